"""A via as a network: as it is, drilled back, and without its stub; what the stub costs is the difference.

    python via_sparameters.py BOARD.xml[.gz] OUTDIR

On the stackup of the demo board, examples/data/demo_board.xml.gz: from a microstrip on TOP to a stripline on IN3. Prints a table
and writes a .s2p of each and a pair's .s4p into OUTDIR; where Matplotlib is there also a picture, via_sparameters.png. Board,
via and link are invented.
"""

import os
import sys
import warnings

import libstub as ls
import numpy as np
from invented import AROUND_PAIR, trace_ports

LINK = ls.Signal(32e9)
CRITERIA = ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.5)
FABRICATOR = ls.Capability(depth_tolerance=50e-6, cut_clearance=50e-6, residual_min=50e-6, residual_target=150e-6,
                           bit_oversize=0.2e-3)
RISE_TIME = 15e-12  # of the step, 20 to 80 percent
F = np.arange(1, 1341) * 50e6  # to 67 GHz: 1/RISE_TIME and more
T = np.arange(-50, 251) * 1e-12


def make_networks(path):
    """{name of its file: transition} of the via, and of a pair of such vias, drilled."""
    board = ls.Stackup.load(path).with_in_plane_ratio(1.15)  # woven glass; the file cannot say it
    via = ls.Via(board, drill=0.25e-3, pad=0.50e-3, antipad=0.75e-3, returns=ls.Ring(4, 1.0e-3), connects=("TOP", "IN3"))
    ports = trace_ports(board, "IN3", distance=5e-3)

    # drilled as planned, and as shallow as the tolerances allow: the longest stub that may be left
    cut = ls.plan(board, [ls.Job(via, LINK, CRITERIA)], FABRICATOR)[0].bottom
    drill = ls.BackDrill("bottom", cut.depth - (cut.residual_most - cut.residual), cut.diameter)
    drilled = via.replace(backdrills=[drill])
    pair = drilled.replace(pair=ls.Pair(1.0e-3), returns=ls.Vias(AROUND_PAIR))
    return {
        "via_as_it_is": via.transition(ports),
        "via_drilled": drilled.transition(ports),
        "via_without_stub": via.transition(ports, stubs="removed"),
        "pair_drilled": pair.transition(ports),
    }


def show(networks):
    """What each is at Nyquist, up to Nyquist, and to an edge."""
    nyquist = LINK.nyquist
    bare = networks["via_without_stub"].s(nyquist)
    for name in ("via_as_it_is", "via_drilled", "via_without_stub"):
        via = networks[name]
        s, at = via.s(F), via.s(nyquist)
        loss, bare_loss = -20 * np.log10(abs(at[1, 0])), -20 * np.log10(abs(bare[1, 0]))
        ripple = ls.insertion_loss_deviation(F, -20 * np.log10(abs(s[:, 1, 0])), f_high=nyquist).rms
        z = ls.tdr(F, s, T, rise_time=RISE_TIME)
        notches = via.notches(up_to=67e9)
        stub = via.via.stubs[0].length if via.stubs == "kept" else 0.0
        print("%-18s%8.3f%9.2f%9.2f%9.2f%9.2f%9.3f%9s%9.1f%7.1f" % (
            name, stub * 1e3, loss, loss - bare_loss, ripple, 20 * np.log10(abs(at[0, 0])), abs(at[0, 0] - bare[0, 0]),
            "%.2f" % (notches[0].f / 1e9) if notches else "none", min(z), max(z)))


def save(networks, folder):
    for name, via in networks.items():
        file = "%s.s%dp" % (name, len(via.reference))
        ports = "1 TOP, 2 IN3" + ("" if len(via.reference) == 2 else "; of the partner 3 TOP, 4 IN3")
        comments = [" %s, invented: an estimate from a model" % name, " ports: %s" % ports]
        ls.touchstone_save(os.path.join(folder, file), F, via.s(F), reference=via.reference, unit="GHz", digits=9,
                           comments=comments)
        print("written: %s" % file)


def to_scikit_rf(via):
    """The same as a network of scikit-rf, or None where that is not installed."""
    try:
        import skrf
    except ImportError:
        return None
    return skrf.Network(f=F, f_unit="hz", s=via.s(F), z0=via.reference)


def draw(networks, folder):
    try:
        import matplotlib.pyplot as plt
    except ImportError:
        print("no plot: Matplotlib is not installed", file=sys.stderr)
        return
    figure, axes = plt.subplots(1, 2, figsize=(12, 4.6), layout="constrained")
    styles = {"via_as_it_is": ("as it is", "tab:red", "-"), "via_drilled": ("drilled back", "tab:blue", "-"),
              "via_without_stub": ("without its stub", "black", "--")}
    for name, (label, colour, line) in styles.items():
        s = networks[name].s(F)
        axes[0].plot(F / 1e9, 20 * np.log10(abs(s[:, 1, 0])), line, color=colour, label=label)
        axes[1].plot(T * 1e12, ls.tdr(F, s, T, rise_time=RISE_TIME), line, color=colour, label=label)
    axes[0].axvline(LINK.nyquist / 1e9, color="grey", linewidth=0.8, linestyle=":")
    axes[0].annotate("Nyquist of\n32 GBd NRZ", (LINK.nyquist / 1e9, -27), xytext=(6, 0), textcoords="offset points", fontsize=8)
    axes[0].set(xlim=(0, 67), ylim=(-32, 1), xlabel="frequency, GHz", ylabel="|S21|, dB", title="Transmission")
    axes[1].set(xlim=(-50, 250), xlabel="time there and back, ps", ylabel="impedance, ohm",
                title="Reflectometry, an edge of 15 ps (20 to 80 %)")
    axes[1].axhline(50.0, color="grey", linewidth=0.8, linestyle=":")
    axes[0].legend(loc="lower right", fontsize=9)
    figure.suptitle("A via from TOP to IN3 between 5 mm of line on either side: model estimate, invented board")
    path = os.path.join(folder, "via_sparameters.png")
    figure.savefig(path, dpi=120)
    plt.close(figure)
    print("saved", path, file=sys.stderr)


def main():
    if len(sys.argv) != 3:
        sys.exit("usage: via_sparameters.py BOARD.xml[.gz] OUTDIR")
    warnings.simplefilter("ignore", ls.RangeWarning)  # the remarks are printed
    networks = make_networks(sys.argv[1])
    print("A via of an invented board from TOP to IN3, with 5 mm of trace on either side, at 16 GHz: Nyquist of 32 GBd NRZ.\n"
          "Caused by the stub: what differs from the same via without it. Ripple: of the loss about a smooth one, to Nyquist.\n"
          "TDR: least and greatest impedance that an edge of 15 ps sees from TOP.\n")
    print("%-18s%8s%9s%9s%9s%9s%9s%9s%9s%7s" % ("", "stub", "loss", "caused", "ripple", "S11", "change", "notch", "TDR", "TDR"))
    print("%-18s%8s%9s%9s%9s%9s%9s%9s%9s%7s" % ("", "mm", "dB", "dB", "dB rms", "dB", "of S11", "GHz", "ohm", "ohm"))
    show(networks)
    print()
    for remark in networks["via_as_it_is"].remarks:
        print("Rests on: %s." % remark)
    print("Estimates from a model: verify critical links by measurement or full-wave simulation, and confirm with the\n"
          "fabricator what its drill can hold.\n")
    save(networks, sys.argv[2])
    network = to_scikit_rf(networks["via_drilled"])
    print("scikit-rf: %s" % (network if network is not None else "not installed"), file=sys.stderr)
    draw(networks, sys.argv[2])


if __name__ == "__main__":
    main()
