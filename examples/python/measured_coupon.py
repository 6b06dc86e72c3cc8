"""From the lab to the model: notches of measured coupons, the laminate's in-plane Dk, and what that says about the board.

    python measured_coupon.py BOARD.xml[.gz] OUTDIR

On the stackup of the demo board, examples/data/demo_board.xml.gz. The measurements are invented: this program makes them
itself, with another in-plane Dk than the stackup has, lossy traces and noise, writes them to OUTDIR as Touchstone files, and
then knows no more than a lab would. Where Matplotlib is there it also draws measured_coupon.png.
"""

import math
import os
import sys
import warnings

import libstub as ls
import numpy as np
from invented import trace_ports

ASSUMED = 1.15  # in-plane over through-plane Dk, before anything was measured
EXITS = ("IN1", "IN2", "IN3", "IN5", "IN6", "IN7")  # a coupon each: from TOP to here, what is below is stub
LENGTH_SIGMA = 5e-6  # m, of a stub's length on a microsection
DRILL = ls.BackDrill("bottom", 1.0e-3, 0.45e-3)  # as ordered for one more coupon, TOP to IN1
LINK = ls.Signal(32e9)
CRITERIA = ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.5)
FABRICATOR = ls.Capability(depth_tolerance=50e-6, cut_clearance=50e-6, residual_min=50e-6, residual_target=150e-6,
                           bit_oversize=0.2e-3)


def make_via(board, exit_layer, backdrills=()):
    return ls.Via(board, drill=0.25e-3, pad=0.50e-3, antipad=0.75e-3, returns=ls.Ring(4, 1.0e-3), connects=("TOP", exit_layer),
                  backdrills=backdrills)


# ---- the invented measurement: nothing below it looks in here ----

TRUE_RATIO, TRUE_DRILL = 1.22, ls.BackDrill("bottom", 0.93e-3, 0.45e-3)


def noise(count, sigma, seed):
    """Normal numbers that are the same everywhere: Park and Miller's generator, Box and Muller's transform."""
    state, numbers = seed, []
    while len(numbers) < count:
        state = 16807 * state % 2147483647
        radius = sigma * math.sqrt(-2.0 * math.log(state / 2147483647))
        state = 16807 * state % 2147483647
        angle = 2.0 * math.pi * state / 2147483647
        numbers += [radius * math.cos(angle), radius * math.sin(angle)]
    return numbers[:count]


def invent_measurements(path, folder):
    board = ls.Stackup.load(path).with_in_plane_ratio(TRUE_RATIO)
    f = np.arange(1, 1601) * 25e6
    coupons = [(name, make_via(board, name)) for name in EXITS] + [("drilled", make_via(board, "IN1", [TRUE_DRILL]))]
    for seed, (name, via) in enumerate(coupons, 1):
        s = via.transition(trace_ports(board, via.connects[-1], distance=40e-3)).s(f)
        s += np.array(noise(2 * s.size, 7e-4, seed)).view(complex).reshape(s.shape)
        ls.touchstone_save(os.path.join(folder, "coupon_%s.s2p" % name), f, s, unit="GHz", digits=6,
                           comments=[" invented: computed, with noise, not measured"])


# ---- the lab ----


def read_notch(folder, name):
    """The first notch of a coupon's S21, or None, and the curves to draw."""
    file = ls.Touchstone.load(os.path.join(folder, "coupon_%s.s2p" % name))
    found = ls.find_notches(file.frequency, file.data[:, 1, 0])
    return (found.notches[0] if found.notches else None), file, found


def show_notch(name, stub, notch):
    if notch is None:
        print("%-9s%8.3f   nothing found to 40 GHz" % (name, stub * 1e3))
        return
    dk = ls.fit_effective_dk(notch.f, stub, f_sigma=notch.f_sigma, length_sigma=LENGTH_SIGMA)
    quality = " ".join(flag.name.lower() for flag in ls.Quality if flag and flag in notch.quality) or "good"
    q = "none" if math.isnan(notch.q) else "%.1f" % notch.q  # the noise hides the floor
    print("%-9s%8.3f%9.3f%8.3f%9.1f%7s%9.3f%8.3f  %s" % (
        name, stub * 1e3, notch.f / 1e9, notch.f_sigma / 1e9, notch.depth_db, q, *dk, quality))


def pull(via):
    """The notch of a whole coupon over that of its stub alone: what the path through the via and its traces move it by."""
    alone = via.model().notches(up_to=60e9)[0].f
    ports = trace_ports(via.stackup, via.connects[-1], distance=2e-3)
    return via.transition(ports).notches(up_to=1.2 * alone)[0].f / alone


def fit_laminate(vias, notches):
    """The fit to all coupons that show a notch, and once more with a common error of length."""
    f = [notch.f / pull(via) for via, notch in zip(vias, notches)]  # of the stub alone
    sigma = [notch.f_sigma for notch in notches]
    fit, free = ls.fit_coupons(vias, f, sigma), ls.fit_coupons(vias, f, sigma, with_offset=True)
    print("\nIn-plane Dk over the data sheet's, all laminates alike: %.4f +/- %.4f, 95 %%: %.4f to %.4f (assumed: %.2f)\n"
          "chi2 %.2f of %d: the model %s" % (
              fit.ratio, fit.ratio_sigma, fit.ratio_low, fit.ratio_high, ASSUMED, fit.chi2, fit.dof,
              "describes them" if fit.describes else "does NOT describe them: do not use it"))
    print("with all stubs longer by the same: %.4f +/- %.4f, longer by %.1f um, 95 %%: %.1f to %.1f" % (
        free.ratio, free.ratio_sigma, free.offset * 1e6, free.offset_low * 1e6, free.offset_high * 1e6))
    return fit, f


def check_drill(board, notch, ratio_sigma):
    """How long the stub of the drilled coupon is, from its notch. Its effective Dk depends on its length, a little: by turns."""
    ordered = make_via(board, "IN1", [DRILL]).stubs[0].length
    length = ordered
    for _ in range(4):
        via = make_via(board, "IN1", [ls.BackDrill("bottom", DRILL.depth + ordered - length, DRILL.diameter)])
        dk = via.model().dk_effective
        length, sigma = ls.fit_length(notch.f / pull(via), dk, f_sigma=notch.f_sigma, dk_sigma=dk * ratio_sigma)
    print("\nDrilled coupon: notch at %.3f GHz, with a Dk of %.3f a stub of %.3f +/- %.3f mm; ordered %.3f mm:\n"
          "the drill stopped %.3f mm short, of %.3f mm allowed. One hole says little of the next one." % (
              notch.f / 1e9, dk, length * 1e3, sigma * 1e3, ordered * 1e3, (length - ordered) * 1e3,
              FABRICATOR.depth_tolerance * 1e3))


def predict(boards):
    """A via of the product, TOP to IN3, on each stackup: as it is, and with the longest stub that the drill may leave."""
    print("\nThe product's via, TOP to IN3, at 32 GBd NRZ: 2 x Nyquist and 0.5 dB wanted\n"
          "%-22s%9s%9s%9s%9s%9s%9s%9s" % ("in-plane ratio", "notch", "limit", "depth", "left", "notch", "Nyquist", "adds"))
    print("%-22s%9s%9s%9s%9s%9s%9s%9s" % ("", "GHz", "mm", "mm", "mm", "GHz", "x", "dB"))
    for name, board in boards:
        d = ls.plan(board, [ls.Job(make_via(board, "IN3"), LINK, CRITERIA)], FABRICATOR)[0]
        print("%-22s%9.2f%9.3f%9.3f%9.3f%9.2f%9.2f%9.3f" % (
            name, d.before.f1 / 1e9, d.bottom.limit * 1e3, d.bottom.depth * 1e3, d.bottom.residual_most * 1e3, d.after.f1 / 1e9,
            d.after.notch_over_nyquist, d.after.added_loss_db))
    print("limit: longest stub that passes; left: longest that the drill may leave, tolerances added; after it: with that stub.")


def draw(curves, vias, f, sigma, fitted, folder):
    try:
        import matplotlib.pyplot as plt
    except ImportError:
        print("no plot: Matplotlib is not installed", file=sys.stderr)
        return
    figure, axes = plt.subplots(1, 2, figsize=(12.5, 4.8), layout="constrained", width_ratios=(1.5, 1))
    for i, (name, (notch, file, found)) in enumerate(curves.items()):
        colour, shift = "C%d" % i, -8.0 * i  # one below the other
        ghz = file.frequency / 1e9
        axes[0].plot(ghz, 20 * np.log10(abs(file.data[:, 1, 0])) + shift, color=colour, linewidth=0.9)
        axes[0].plot(ghz, found.trend_db + shift, color=colour, linewidth=0.8, linestyle="--")
        axes[0].text(-0.4, shift, name, color=colour, fontsize=9, ha="right", va="center")
        if notch is not None:
            axes[0].plot(notch.f / 1e9, found.averaged_db[abs(file.frequency - notch.f).argmin()] + shift, "v", color=colour)
    axes[0].set(xlim=(-5, 40), xticks=range(0, 41, 5), xlabel="frequency, GHz",
                ylabel="|S21|, dB; each coupon 8 dB lower than the last",
                title="Coupons: S21, loss without the stub (dashed), first notch")
    predicted = {"assumed ratio %.2f" % ASSUMED: ls.first_notch_batch(vias).f1,
                 "fitted ratio %.3f" % fitted.ratio: np.array(f) - np.array(fitted.residuals)}
    for (label, p), marker in zip(predicted.items(), "os"):
        axes[1].errorbar([via.stubs[0].length * 1e3 for via in vias], 100 * (np.array(f) / p - 1),
                         yerr=200 * np.array(sigma) / p, fmt=marker, capsize=3, label=label)
    axes[1].axhline(0.0, color="black", linewidth=0.8)
    axes[1].set(xlabel="stub, mm", ylabel="measured over predicted first notch - 1, %", title="Notch of the stub, with 2 sigma")
    axes[1].legend(fontsize=9, loc="center right")
    figure.suptitle("Measured coupons of an invented board; the measurements are invented, too")
    path = os.path.join(folder, "measured_coupon.png")
    figure.savefig(path, dpi=120)
    plt.close(figure)
    print("saved", path, file=sys.stderr)


def main():
    if len(sys.argv) != 3:
        sys.exit("usage: measured_coupon.py BOARD.xml[.gz] OUTDIR")
    path, folder = sys.argv[1:]
    warnings.simplefilter("ignore", ls.RangeWarning)  # a microstrip on TOP: nothing was compared with it
    invent_measurements(path, folder)

    board = ls.Stackup.load(path).with_in_plane_ratio(ASSUMED)
    print("Coupons of an invented board, TOP to the layer named. The measurements are invented: computed, with noise.\n")
    print("%-9s%8s%9s%8s%9s%7s%9s%8s  %s" % ("coupon", "stub", "notch", "+/-", "depth", "Q", "Dk eff", "+/-", "quality"))
    print("%-9s%8s%9s%8s%9s" % ("", "mm", "GHz", "GHz", "dB"))
    curves = {name: read_notch(folder, name) for name in (*EXITS, "drilled")}
    for name in EXITS:
        show_notch(name, make_via(board, name).stubs[0].length, curves[name][0])
    shown = [name for name in EXITS if curves[name][0] is not None]
    vias, notches = [make_via(board, name) for name in shown], [curves[name][0] for name in shown]
    fit, f = fit_laminate(vias, notches)
    check_drill(fit.stackup, curves["drilled"][0], fit.ratio_sigma)
    predict([("%.4f, assumed" % ASSUMED, board), ("%.4f, fitted" % fit.ratio, fit.stackup),
             ("%.4f, upper end" % fit.ratio_high, board.with_in_plane_ratio(fit.ratio_high))])
    print("\nPut into the invented measurement: in-plane ratio %.2f, drill %.3f mm short.\n"
          "The intervals are those of the measurement: the model's own error comes on top (docs/theory.md), and other lots of the\n"
          "laminate differ. Confirm depths and tolerances with the fabricator; verify critical links by measurement." % (
              TRUE_RATIO, (DRILL.depth - TRUE_DRILL.depth) * 1e3))
    draw(curves, vias, f, [notch.f_sigma for notch in notches], fit, folder)


if __name__ == "__main__":
    main()
