"""What the effective Dk of a stub is, for ten geometries on one board, and why it is not the laminate's.

The effective Dk is the one that makes the plain quarter wave right: (c/(4 L f1))^2. It has two causes, which the table
shows apart: inductance, of how far out the return current flows, and capacitance, to the planes that the barrel passes.
The board is invented.
"""

import libstub as ls

DK, RATIO, SPACING, PAD = 3.6, 1.15, 0.13e-3, 0.50e-3
COUNT, EXIT = 16, "L3"


def make_board():
    resin = ls.Dielectric(DK, 0.004, in_plane_ratio=RATIO, f_ref=10e9)
    layers = []
    for n in range(1, COUNT + 1):
        layers.append(ls.Layer("L%d" % n, "plane" if n % 2 == 0 and n < COUNT else "signal", 18e-6))
        if n < COUNT:
            layers.append(ls.Layer("D%d" % n, "dielectric", SPACING, dielectric=resin))
    return ls.Stackup(layers)


def make_vias():
    """(what is special, the via, why its Dk is what it is)"""
    base = ls.Via(make_board(), drill=0.25e-3, pad=PAD, antipad=0.80e-3, returns=ls.Ring(4, 1.0e-3), connects=("L1", EXIT))
    bottom = "L%d" % COUNT
    every_other = {"L%d" % n: 0.0 for n in range(6, COUNT, 4)}
    cut = ls.BackDrill("bottom", 0.9e-3, 0.45e-3)
    return [
        ("as drawn", base, "planes draw the field in, and add capacitance"),
        ("pads kept on all layers", base.replace(nonfunctional_pads=True), "every pad is one more capacitor to its plane"),
        ("no pad at the end", base.replace(pads={bottom: 0.0}), "the end pad's capacitance hits hardest: all voltage is there"),
        ("antipad 0.60 mm", base.replace(antipad=0.60e-3), "planes come nearer: capacitance up"),
        ("antipad 1.10 mm", base.replace(antipad=1.10e-3), "planes go away: capacitance down"),
        ("return vias at 0.65 mm", base.replace(returns=ls.Ring(4, 0.65e-3)), "a smaller loop: inductance down"),
        ("return vias at 1.80 mm", base.replace(returns=ls.Ring(4, 1.8e-3)), "a wider loop: inductance up, capacitance as it was"),
        ("no return via near", base.replace(returns=None), "the return spreads out between the planes, and radiates"),
        ("every other plane cut out", base.replace(antipads=every_other), "fewer edges for the field to end on"),
        ("drilled back", base.replace(backdrills=[cut]), "nearer to the cavities' own resonance: L' up, though it ends in air"),
    ]


def main():
    print("Laminate: Dk %.2f through the plane, %.2f in it. Via 0.25 mm from L1 to %s of %d layers.\n" % (DK, DK * RATIO, EXIT, COUNT))
    print("%-26s%8s%8s%8s%9s%9s%9s%9s  %s" % ("geometry", "stub", "f1", "depth", "Dk eff", "+/-", "L'", "C'", "why"))
    print("%-26s%8s%8s%8s%9s%9s%9s%9s" % ("", "mm", "GHz", "dB", "", "", "nH/mm", "pF/mm"))
    rows = []
    for name, via, why in make_vias():
        model = via.model()
        notch, line, length = model.notches(up_to=110e9)[0], model.line(), model.stubs[0].length
        rows.append((name, line.dk_effective))
        print("%-26s%8.3f%8.2f%8.1f%9.2f%9.2f%9.3f%9.3f  %s" % (
            name, length * 1e3, notch.f / 1e9, notch.depth_db, line.dk_effective, 2 * notch.error * line.dk_effective,
            line.inductance * 1e6, line.capacitance * 1e9, why))
    low, high = min(rows, key=lambda row: row[1]), max(rows, key=lambda row: row[1])
    print("\nFrom %.2f (%s) to %.2f (%s): no one number does for a laminate, let alone its data-sheet Dk.\n"
          "L' and C' are those of the uniform line with the same first notch and the same charge. Estimates from a model:\n"
          "verify critical links by measurement." % (low[1], low[0], high[1], high[0]))


if __name__ == "__main__":
    main()
