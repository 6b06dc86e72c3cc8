"""What moves the first notch of a stub: each dimension of one via 10 % up and 10 % down, by itself.

Prints a table. Where Matplotlib is there it also draws what_moves_the_notch.png into the folder named by LSTUB_OUT, else into
`out`. The board is invented.
"""

import os
import sys

import libstub as ls

STEP = 0.10
COUNT, EXIT = 16, 3  # copper layers, every second one a plane; the layer where the signal leaves
BASE = {
    "layer spacing, the stub with it": 0.13e-3,
    "copper, at the same pitch of layers": 18e-6,
    "drill": 0.25e-3,
    "antipad": 0.80e-3,
    "pad at the end": 0.50e-3,
    "distance of the return vias": 1.0e-3,
    "drill of the return vias": 0.25e-3,
    "Dk in the plane": 4.14,
    "Dk through the plane": 3.60,
}


def make_via(spacing, copper, drill, antipad, end_pad, distance, return_drill, dk_in_plane, dk):
    """The via with the sizes of BASE, in its order. Thicker copper takes its room from the dielectrics."""
    resin = ls.Dielectric(dk, 0.004, in_plane_ratio=dk_in_plane / dk, f_ref=10e9)
    spacing += BASE["copper, at the same pitch of layers"] - copper
    layers = []
    for n in range(1, COUNT + 1):
        layers.append(ls.Layer("L%d" % n, "plane" if n % 2 == 0 and n < COUNT else "signal", copper))
        if n < COUNT:
            layers.append(ls.Layer("D%d" % n, "dielectric", spacing, dielectric=resin))
    return ls.Via(ls.Stackup(layers), drill=drill, pad=0.5e-3, pad_end=end_pad, antipad=antipad,
                  returns=ls.Ring(4, distance, return_drill), connects=("L1", "L%d" % EXIT))


def changed(name, factor):
    return make_via(*[size * factor if other == name else size for other, size in BASE.items()])


def draw(rows, f1, folder):
    """Bars from the notch as it is, the strongest on top."""
    try:
        import matplotlib.pyplot as plt
    except ImportError:
        print("no plot: Matplotlib is not installed", file=sys.stderr)
        return
    figure, axis = plt.subplots(figsize=(9, 4.8), layout="constrained")
    names = [name for name, _, _ in rows]
    for up, colour, label in ((True, "tab:orange", "10 % more of it"), (False, "tab:blue", "10 % less of it")):
        values = [100 * (high if up else low) for _, high, low in rows]
        axis.barh(names, values, color=colour, label=label, height=0.62, alpha=0.9)
    for i, (_, high, low) in enumerate(rows):
        text = "%+.1f %% / %+.1f %%" % (100 * high, 100 * low)
        axis.annotate(text, (100 * max(high, low), i), xytext=(4, 0), textcoords="offset points", va="center", fontsize=8)
    axis.invert_yaxis()
    axis.axvline(0, color="black", linewidth=0.8)
    reach = 100 * max(abs(value) for row in rows for value in row[1:])
    axis.set_xlim(-1.1 * reach, 1.45 * reach)
    axis.set_xlabel("change of the first notch, %% of %.2f GHz" % (f1 / 1e9))
    axis.set_title("What moves the first notch of a stub (invented board, %d layers)" % COUNT)
    axis.legend(loc="lower right", fontsize=8)
    os.makedirs(folder, exist_ok=True)
    path = os.path.join(folder, "what_moves_the_notch.png")
    figure.savefig(path, dpi=120)
    plt.close(figure)
    print("saved", path, file=sys.stderr)


def main():
    vias = [make_via(*BASE.values())]
    for name in BASE:
        vias += [changed(name, 1 + STEP), changed(name, 1 - STEP)]
    f1 = ls.first_notch_batch(vias).f1  # each on a stackup of its own, in one call
    rows = [(name, f1[1 + 2 * i] / f1[0] - 1, f1[2 + 2 * i] / f1[0] - 1) for i, name in enumerate(BASE)]
    rows.sort(key=lambda row: -max(abs(row[1]), abs(row[2])))
    notch = vias[0].model().notches(up_to=60e9)[0]
    print("%s of %.3f mm below L%d: first notch at %.2f GHz, +/- %.2f %%.\n" % (
        "Stub", vias[0].stubs[0].length * 1e3, EXIT, f1[0] / 1e9, 100 * notch.error))
    print("%-38s%12s%12s" % ("by itself", "10 % more", "10 % less"))
    for name, high, low in rows:
        print("%-38s%10.2f %%%10.2f %%" % (name, 100 * high, 100 * low))
    print("\nEstimates from a model: verify critical links by measurement. The board is invented.")
    draw(rows, f1[0], os.environ.get("LSTUB_OUT", "out"))


if __name__ == "__main__":
    main()
