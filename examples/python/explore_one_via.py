# %% [markdown]
# # One via, looked at from all sides
#
# A line card of 20 copper layers (invented) carries a link of 53.125 GBd PAM4. It enters a through via on L1 and leaves
# on L5; from there to the bottom the barrel hangs on the link as a stub. What does the stub do, and how much of it has to
# go? Runs as a notebook, cell by cell, or as a script (`python explore_one_via.py`); pictures go to the folder named by
# LSTUB_OUT, else to `out`.

# %%
import os
import warnings

import matplotlib.pyplot as plt
import numpy as np

import libstub as ls
from invented import make_stackup, make_via

OUT = os.environ.get("LSTUB_OUT", "out")
os.makedirs(OUT, exist_ok=True)
BLACK, ORANGE, SKY, GREEN, VERMILION = "#000000", "#E69F00", "#56B4E9", "#009E73", "#D55E00"  # told apart by everybody
warnings.simplefilter("ignore", ls.RangeWarning)  # the pictures shade what lies outside the model's stated range


def save(figure, name):
    path = os.path.join(OUT, name)
    figure.savefig(path, dpi=120)
    print("saved", path)


def shade_beyond(axis, model):
    """Grey where the model is stretched beyond its stated range."""
    right = axis.get_xlim()[1]
    axis.axvspan(model.line().f_range / 1e9, right, color="0.9", zorder=0, label="outside the model's stated range")
    axis.set_xlim(right=right)


# %% [markdown]
# ## The geometry

# %%
board = make_stackup("line card")
via = make_via(board, ("L1", "L5"))
link = ls.Signal(baud=ls.gbd(53.125), levels=4)
criteria = ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.5)
print(board)
print(via)
print(via.stubs)

# %% [markdown]
# ## What the stub is
#
# As a line: its effective Dk is far above the laminate's, because the current returns through vias 1 mm away while the
# field reaches the rims of the antipads. The bulk model does not know that, and puts the notch much too high.

# %%
model, bulk = via.model(), via.model(fidelity="bulk")
for m in (bulk, model):
    line = m.line()
    print(f"{line.fidelity:7s} Dk {line.dk_effective:5.2f}, {line.impedance:5.1f} ohm, "
          f"notches at {', '.join(f'{n.f / 1e9:.1f}' for n in m.notches(up_to=ls.ghz(67)))} GHz, "
          f"stated error {100 * line.stated_error:.0f} %")
margin = model.margin(link, criteria)
print(f"{'passes' if margin.passes else 'fails'}: first notch at {margin.notch_over_nyquist:.2f} x Nyquist, "
      f"{criteria.notch_over_nyquist} wanted; {margin.added_loss_db:.2f} dB at Nyquist, {criteria.added_loss_db} allowed")

# %% [markdown]
# ## Input impedance
#
# Where the reactance passes zero upwards the stub is a short across the link: those are the notches. Where the
# impedance is high the stub is hardly there.

# %%
f = np.linspace(0.1e9, 67e9, 4000)
zin = model.zin(f)
figure, axis = plt.subplots(figsize=(8, 4.5), layout="constrained")
axis.semilogy(f / 1e9, np.abs(zin), color=BLACK, label="|Zin|")
axis.semilogy(f / 1e9, zin.real, color=ORANGE, ls="--", label="Re Zin")
for notch in model.notches(up_to=f[-1]):
    axis.axvline(notch.f / 1e9, color=VERMILION, ls=":", lw=1.2)
    axis.annotate(f"{notch.f / 1e9:.1f} GHz", (notch.f / 1e9, 7e3), rotation=90, ha="right", va="top",
                  color=VERMILION)
axis.axhline(25, color=SKY, lw=1, label="25 ohm: two matched 50 ohm lines in parallel")
axis.set(xlim=(0, 67), ylim=(1e-2, 1e4), xlabel="frequency, GHz", ylabel="impedance, ohm",
         title=f"Input impedance of a {via.stubs[0].length * 1e3:.2f} mm stub (loaded-barrel model)")
shade_beyond(axis, model)
axis.legend(loc="lower right", fontsize=8)
save(figure, "one_via_zin.png")

# %% [markdown]
# ## Transmission, as it is and drilled back
#
# A back-drill from the bottom with a bit 0.2 mm wider than the barrel, so deep that 0.4 mm or 0.2 mm of stub stay.

# %%
bottom = board.depth("L20").bottom
residuals = [None, 0.4e-3, 0.2e-3]


def drilled(residual):
    """The via with so much stub left below L5; None: not drilled."""
    if residual is None:
        return via
    depth = bottom - (board.depth("L5").bottom + residual)
    return via.replace(backdrills=[ls.BackDrill("bottom", depth, via.drill + ls.mm(0.2))])


figure, axis = plt.subplots(figsize=(8, 4.5), layout="constrained")
for residual, color, style in zip(residuals, (VERMILION, ORANGE, GREEN), ("-", "--", "-.")):
    v = drilled(residual)
    s21 = 20 * np.log10(np.abs(v.model().s21(f)))
    label = f"{'drilled, ' if residual else 'as it is, '}{v.stubs[0].length * 1e3:.2f} mm stub"
    axis.plot(f / 1e9, s21, color=color, ls=style, label=label)
axis.axvline(link.nyquist / 1e9, color=BLACK, lw=1, ls=":", label="Nyquist of 53.125 GBd")
axis.set(xlim=(0, 67), ylim=(-45, 1), xlabel="frequency, GHz", ylabel="|S21|, dB (50 ohm)",
         title="What the stub takes from the link (dielectric loss only)")
shade_beyond(axis, model)
axis.legend(loc=(0.22, 0.03), fontsize=8)
save(figure, "one_via_s21.png")

# %% [markdown]
# ## First notch against stub length
#
# The quarter-wave rule with the laminate's Dk is an optimist; the difference matters most for the short stubs that a
# drill leaves, where the open end and the pad weigh most.

# %%
lengths = np.linspace(0.1e-3, 1.8e-3, 171)
stubs = [drilled(length) for length in lengths]
loaded_f1 = ls.first_notch_batch(stubs)
bulk_f1 = ls.first_notch_batch(stubs, fidelity="bulk")
figure, axis = plt.subplots(figsize=(8, 4.5), layout="constrained")
axis.loglog(lengths * 1e3, bulk_f1.f1 / 1e9, color=SKY, ls="--", label="bulk: quarter wave in the laminate")
axis.loglog(lengths * 1e3, loaded_f1.f1 / 1e9, color=BLACK, label="loaded barrel: returns, antipads, pads, open end")
inside = loaded_f1.status == ls.Status.OK
axis.loglog(lengths[inside] * 1e3, loaded_f1.f1[inside] / 1e9, color=BLACK, lw=4, label="the same, inside its stated range")
for rate, color in ((25.78125, GREEN), (53.125, ORANGE), (106.25, VERMILION)):
    axis.axhline(rate, color=color, lw=1, ls=":")
    axis.annotate(f"2 x Nyquist of {rate} GBd", (0.1, rate * 1.03), fontsize=8, color=color)
axis.set(xlabel="stub length below L5, mm", ylabel="first notch, GHz", title="First notch of a drilled stub, two models")
axis.set_xticks([0.1, 0.2, 0.5, 1, 1.8], ["0.1", "0.2", "0.5", "1", "1.8"])
axis.set_yticks([20, 50, 100, 200, 500], ["20", "50", "100", "200", "500"])
axis.minorticks_off()
axis.grid(alpha=0.3)
axis.legend(fontsize=8)
save(figure, "one_via_notch.png")

# %% [markdown]
# ## How much stub may stay
#
# Loss at Nyquist against the stub that is left, for three links; the dot is the longest stub that passes both criteria,
# found by the library. With a depth tolerance of 0.1 mm the drill must aim that much shorter. Low loss at Nyquist beyond
# the first peak saves nobody: the notch then lies inside the signal's band, and the criteria fail it.

# %%
figure, axis = plt.subplots(figsize=(8, 4.5), layout="constrained")
for rate, levels, color, style in ((25.78125, 2, GREEN, "-."), (53.125, 4, ORANGE, "--"), (106.25, 4, VERMILION, "-")):
    signal = ls.Signal(baud=ls.gbd(rate), levels=levels)
    margins = ls.margin_batch(stubs, signal, criteria)
    axis.semilogy(lengths * 1e3, margins.added_loss_db, color=color, ls=style,
                  label=f"{rate} GBd {'NRZ' if levels == 2 else 'PAM4'}")
    limit = ls.longest_stub(via, signal, criteria)
    loss = drilled(limit.length).model().added_loss(signal.nyquist)
    axis.plot(limit.length * 1e3, loss, "o", color=color)
    print(f"{rate:9.5f} GBd: longest stub {limit.length * 1e3:.3f} mm, limited by {limit.limited_by}")
axis.axhline(criteria.added_loss_db, color=BLACK, lw=1, ls=":", label="0.5 dB: what the criteria allow")
axis.set(xlim=(0, 1.8), ylim=(1e-2, 60), xlabel="stub length below L5, mm", ylabel="loss added at Nyquist, dB",
         title="What a stub of this length costs, and how long it may be (dots)")
axis.grid(alpha=0.3)
axis.legend(fontsize=8)
save(figure, "one_via_margin.png")

# %% [markdown]
# These are estimates from a model. Confirm drill depths, tolerances and clearances with the fabricator; verify critical
# links by measurement or full-wave simulation.
