"""Which routing layers need no drilling: for three stackups and six data rates a through via from L1 to each.

Prints tables. Where Matplotlib is there it also draws a heat map, stackup_sweep.png, into the folder named by LSTUB_OUT,
else into `out`.
"""

import os
import sys
import warnings

import libstub as ls
from invented import LINKS, STACKUPS, is_plane, make_stackup, make_via

CRITERIA = ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.5)


def sweep(name):
    """Routing layers of a stackup, and by link the margins of a via from L1 to each."""
    count, board = STACKUPS[name][0], make_stackup(name)
    layers = [n for n in range(3, count + 1) if not is_plane(n, count)]
    vias = [make_via(board, ("L1", "L%d" % n)) for n in layers]
    return layers, [ls.margin_batch(vias, signal, CRITERIA) for signal in LINKS.values()]


def show(name, layers, margins):
    print("\n%s, %d copper layers" % (name, STACKUPS[name][0]))
    print("%-6s%9s" % ("layer", "stub/mm") + "".join("%19s" % link for link in LINKS))
    for i, layer in enumerate(layers):
        row = "L%-5d%9.3f" % (layer, margins[0].stub_length[i] * 1e3)
        for m in margins:
            text = "no stub"
            if m.stub_length[i] > 0.0:
                marks = ("~" if m.status[i] == ls.Status.W_RANGE else "") + ("" if m.passes[i] else "DRILL ")
                text = "%s%.1fx %.1fdB" % (marks, m.notch_over_nyquist[i], m.added_loss_db[i])
            row += "%19s" % text
        print(row)


def draw(results, folder):
    """A heat map of the first notch over Nyquist, and what has to be drilled."""
    try:
        import matplotlib.pyplot as plt
        from matplotlib.colors import LogNorm
    except ImportError:
        print("no heat map: Matplotlib is not installed", file=sys.stderr)
        return
    figure, axes = plt.subplots(1, len(results), figsize=(14, 7), layout="constrained")
    for axis, (name, (layers, margins)) in zip(axes, results.items()):
        ratio = [[min(m.notch_over_nyquist[i], 20.0) for m in margins] for i in range(len(layers))]
        # the middle of the colours is 2: what is asked
        image = axis.imshow(ratio, aspect="auto", cmap="PuOr", norm=LogNorm(0.2, 20.0))
        for i in range(len(layers)):
            for k, m in enumerate(margins):
                beyond = "~" if m.status[i] == ls.Status.W_RANGE else ""
                text = "%s%s%.1f" % (beyond, "" if m.passes[i] else "drill ", m.notch_over_nyquist[i])
                text = text if m.stub_length[i] > 0.0 else "no stub"
                dark = not 0.6 < ratio[i][k] < 7.0
                axis.text(k, i, text, ha="center", va="center", fontsize=7.5, color="white" if dark else "black")
        axis.set_xticks(range(len(LINKS)), [link.replace(" GBd ", "\nGBd ") for link in LINKS], fontsize=7)
        axis.set_yticks(range(len(layers)), ["L%d" % n for n in layers])
        axis.set_title("%s, %d copper layers" % (name, STACKUPS[name][0]))
    axes[0].set_ylabel("layer on which the via leaves (it enters on L1)")
    bar = figure.colorbar(image, ax=axes, ticks=[0.2, 0.5, 1, 2, 5, 10, 20], format="%g", extend="both")
    bar.set_label("first notch over Nyquist; at least 2 is asked, and at most 0.5 dB more loss at Nyquist")
    figure.suptitle("Which routing layers need no drilling: through vias, model estimate (~ outside its stated range), "
                    "invented stackups")
    os.makedirs(folder, exist_ok=True)
    path = os.path.join(folder, "stackup_sweep.png")
    figure.savefig(path, dpi=120)
    plt.close(figure)
    print("saved", path, file=sys.stderr)


def main():
    warnings.simplefilter("ignore", ls.RangeWarning)  # the table marks them
    print("Through vias from L1 to each routing layer: first notch over Nyquist, and loss added at Nyquist.\n"
          "DRILL: below 2 x or above 0.5 dB, so the stub has to go. ~: outside the stated range of the model.\n"
          "Stackups and links are invented.")
    results = {name: sweep(name) for name in STACKUPS}
    for name, (layers, margins) in results.items():
        show(name, layers, margins)
    draw(results, os.environ.get("LSTUB_OUT", "out"))


if __name__ == "__main__":
    main()
