"""A pair whose back-drills differ: mode conversion and skew against the tolerance of the drill, and with one drill forgotten.

    python pair_skew.py BOARD.xml[.gz] OUTDIR

On the stackup of the demo board, examples/data/demo_board.xml.gz: a pair of vias from TOP to IN3, the first drilled deeper by the
tolerance, its partner less deep by as much. Prints a table, writes the mixed modes of the pair with the forgotten drill to
OUTDIR, pair_one_missing.ts; where Matplotlib is there also a picture, pair_skew.png. Board, pair and link are invented.
"""

import math
import os
import sys
import warnings

import libstub as ls
import numpy as np
from invented import AROUND_PAIR, trace_ports

LINK = ls.Signal(25.78125e9)
DEPTH, BIT = 1.45e-3, 0.45e-3  # as ordered, m
TOLERANCES = (0.0, 25e-6, 50e-6, 75e-6, 100e-6)  # m, plus or minus
RISE_TIME = 15e-12  # of the step, 20 to 80 percent
LEGS = [(0, 2), (1, 3)]  # ports of the pair: first and partner, on TOP and on IN3
F = np.arange(1, 671) * 100e6  # to 67 GHz: 1/RISE_TIME and more
T = np.arange(-50, 251) * 1e-12


def make_pair(board, depth, partner_depth):
    """The pair as a network; depths of the drills in m, None: forgotten."""
    def drills(depth):
        return [] if depth is None else [ls.BackDrill("bottom", depth, BIT)]

    via = ls.Via(board, drill=0.25e-3, pad=0.50e-3, antipad=0.75e-3, connects=("TOP", "IN3"), backdrills=drills(depth),
                 pair=ls.Pair(1.0e-3, backdrills=drills(partner_depth)),
                 returns=ls.Vias(AROUND_PAIR))
    return via.transition(trace_ports(board, "IN3", distance=5e-3))


def db(z):
    return 20 * math.log10(abs(z)) if abs(z) > 1e-10 else -math.inf  # less is rounding


def legs(s):
    """What comes out of each leg when both are driven with opposite signs, of one frequency or of many."""
    return s[..., 1, 0] - s[..., 1, 2], s[..., 3, 2] - s[..., 3, 0]


def step_of_legs(s):
    """The same against time, to a unit step."""
    def step(to, from_):
        return ls.step_response(F, s, T, rise_time=RISE_TIME, to=to, from_=from_)
    return step(1, 0) - step(1, 2), step(3, 2) - step(3, 0)


def half_way(response):
    """The time at which a step is at 0.5, s."""
    k = next(k for k in range(1, len(T)) if response[k] >= 0.5)
    return T[k - 1] + (T[k] - T[k - 1]) * (0.5 - response[k - 1]) / (response[k] - response[k - 1])


def show(name, board, depth, partner_depth):
    pair = make_pair(board, depth, partner_depth)
    at = pair.s(LINK.nyquist)
    mixed = ls.to_mixed([at], LEGS).s[0]  # differential on TOP, on IN3; common on TOP, on IN3
    one, other = legs(at)
    ratio = one * other.conjugate()
    skew = math.atan2(ratio.imag, ratio.real) / (2 * math.pi * LINK.nyquist)
    s = pair.s(F)
    steps = step_of_legs(s)
    stub = board.depth("BOTTOM").bottom - board.depth("IN3").bottom
    print("%-12s%9.3f%9.3f%9.2f%9.2f%9.2f%11.2f%10.2f" % (
        name, (stub - depth) * 1e3, (stub - (partner_depth or 0.0)) * 1e3, db(mixed[1, 0]), db(mixed[3, 0]), db(mixed[1, 2]),
        abs(skew) * 1e12, abs(half_way(steps[1]) - half_way(steps[0])) * 1e12))
    return pair, s, steps


def save_mixed(pair, s, path):
    """The network in mixed modes, as Touchstone 2 has them."""
    mixed = ls.to_mixed(s, LEGS, z=pair.reference)
    rows = [ls.TouchstoneRow(kind, *ports) for kind in ("differential", "common") for ports in LEGS]
    ls.touchstone_save(path, F, mixed.s, reference=pair.reference, rows=rows, version=2, unit="GHz", digits=9,
                       comments=[" an invented pair, one drill forgotten: an estimate from a model",
                                 " ports: 1 TOP, 2 IN3; of the partner 3 TOP, 4 IN3"])
    print("written: %s" % os.path.basename(path))


def draw(results, folder):
    try:
        import matplotlib.pyplot as plt
    except ImportError:
        print("no plot: Matplotlib is not installed", file=sys.stderr)
        return
    figure, axes = plt.subplots(1, 2, figsize=(12.5, 4.8), layout="constrained")
    drawn = {"+/- 0 um": "black", "+/- 50 um": "tab:blue", "+/- 100 um": "tab:green", "one missing": "tab:red"}
    for name, colour in drawn.items():
        _, s, (one, other) = results[name]
        mixed = ls.to_mixed(s, LEGS).s
        axes[0].plot(F / 1e9, 20 * np.log10(abs(mixed[:, 1, 0])), color=colour, label="Sdd21, %s" % name)
        if name != "+/- 0 um":
            axes[0].plot(F / 1e9, 20 * np.log10(abs(mixed[:, 3, 0])), "--", color=colour, label="Scd21, %s" % name)
        if name in ("+/- 100 um", "one missing"):
            axes[1].plot(T * 1e12, one, color=colour, label="first leg, %s" % name)
            axes[1].plot(T * 1e12, other, "--", color=colour, label="partner, %s" % name)
    axes[0].axvline(LINK.nyquist / 1e9, color="grey", linewidth=0.8, linestyle=":")
    axes[0].annotate("Nyquist of\n25.78125 GBd NRZ", (LINK.nyquist / 1e9, -57), xytext=(4, 0), textcoords="offset points",
                     fontsize=8)
    axes[0].set(xlim=(0, 67), ylim=(-60, 2), xlabel="frequency, GHz", ylabel="|S|, dB",
                title="Transmission, and what becomes common mode")
    axes[0].legend(loc="lower right", fontsize=8)
    axes[1].axhline(0.5, color="grey", linewidth=0.8, linestyle=":")
    axes[1].set(xlim=(0, 200), xlabel="time, ps", ylabel="of the step sent", title="Each leg's step response, an edge of 15 ps")
    axes[1].legend(loc="lower right", fontsize=8)
    figure.suptitle("A pair from TOP to IN3 with unequal back-drills: model estimate, invented board")
    path = os.path.join(folder, "pair_skew.png")
    figure.savefig(path, dpi=120)
    plt.close(figure)
    print("saved", path, file=sys.stderr)


def main():
    if len(sys.argv) != 3:
        sys.exit("usage: pair_skew.py BOARD.xml[.gz] OUTDIR")
    path, folder = sys.argv[1:]
    warnings.simplefilter("ignore", ls.RangeWarning)  # the remarks are printed
    board = ls.Stackup.load(path).with_in_plane_ratio(1.15)  # woven glass; the file cannot say it
    print("A pair of an invented board, TOP to IN3, drilled back %.2f mm. 25.78125 GBd NRZ: Nyquist %.4f GHz, %.1f ps a symbol.\n"
          "Drill +/-: the first hole deeper by this, its partner less deep. Skew: between the legs, driven with opposite signs;\n"
          "beyond the notch of a leg its phase has turned, and a skew at one frequency says little. -inf: none, but for rounding.\n"
          % (DEPTH * 1e3, LINK.nyquist / 1e9, 1e12 / LINK.baud))
    print("%-12s%9s%9s%9s%9s%9s%11s%10s" % ("drill", "stub", "partner", "Sdd21", "Scd21", "Sdc21", "skew", "skew of"))
    print("%-12s%9s%9s%9s%9s%9s%11s%10s" % ("", "mm", "mm", "dB", "dB", "dB", "at Nyq. ps", "a step ps"))
    results = {}
    for tolerance in TOLERANCES:
        name = "+/- %.0f um" % (tolerance * 1e6)
        results[name] = show(name, board, DEPTH + tolerance, DEPTH - tolerance)
    results["one missing"] = show("one missing", board, DEPTH, None)
    pair, s, _ = results["one missing"]
    print()
    for remark in pair.remarks:
        print("Rests on: %s." % remark)
    print("Estimates from a model: verify critical links by measurement or full-wave simulation. What a drill really holds, and\n"
          "whether two neighbours miss it the same way, the fabricator has to say.\n")
    save_mixed(pair, s, os.path.join(folder, "pair_one_missing.ts"))
    draw(results, folder)


if __name__ == "__main__":
    main()
