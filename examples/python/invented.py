"""Stackups, links and traces that the examples share. All invented, though of sizes that exist."""

import libstub as ls

# name: copper layers, spacing (m), Dk, loss tangent
STACKUPS = {
    "module": (12, 0.090e-3, 3.05, 0.0016),
    "line card": (20, 0.105e-3, 3.35, 0.0040),
    "backplane": (28, 0.125e-3, 3.70, 0.0080),
}
LINKS = {
    "10.3125 GBd NRZ": ls.Signal(10.3125e9),
    "25.78125 GBd NRZ": ls.Signal(25.78125e9),
    "26.5625 GBd PAM4": ls.Signal(26.5625e9, levels=4),
    "32 GBd NRZ": ls.Signal(32e9),
    "53.125 GBd PAM4": ls.Signal(53.125e9, levels=4),
    "106.25 GBd PAM4": ls.Signal(106.25e9, levels=4),
}


def is_plane(number, count):
    """Copper layer `number` of `count`, from 1: signals and planes take turns from both sides inwards."""
    return (number if number <= count // 2 else count + 1 - number) % 2 == 0


def make_stackup(name):
    count, spacing, dk, loss_tangent = STACKUPS[name]
    resin = ls.Dielectric(dk, loss_tangent, in_plane_ratio=1.15)
    layers = []
    for n in range(1, count + 1):
        kind = "plane" if is_plane(n, count) else "signal"
        layers.append(ls.Layer(f"L{n}", kind, 45e-6 if n in (1, count) else 18e-6))
        if n < count:
            layers.append(ls.Layer(f"D{n}", "dielectric", spacing, dielectric=resin))
    return ls.Stackup(layers)


def make_via(stackup, connects):
    """A through via of 0.25 mm with four return vias 1 mm away; the caller says where it connects."""
    return ls.Via(stackup, drill=0.25e-3, pad=0.50e-3, antipad=0.75e-3, returns=ls.Ring(4, 1.0e-3), connects=connects)


# Return vias around a pair with its first barrel at (0, 0) and its partner at (1, 0) mm, m.
AROUND_PAIR = [(-1e-3, 0.0), (0.0, -1e-3), (0.0, 1e-3), (1e-3, -1e-3), (1e-3, 1e-3), (2e-3, 0.0)]


def trace_ports(board, exit_layer, distance):
    """Ports of a via on the Heron line card of examples/data: a microstrip on TOP, a stripline on one of its inner layers.

    Cross-sections are those of the stackup; between two planes a stripline has one dielectric below and one above. The
    thin solder mask on the microstrip is left out.
    """
    def around(layer):
        i = board.index(layer)
        return board.layers[i - 1], board.layers[i], board.layers[i + 1]

    above, top, below = around("TOP")
    microstrip = ls.Microstrip(width=0.24e-3, thickness=top.thickness, conductor=top.conductor,
                               height_below=below.thickness, dielectric_below=below.dielectric)
    above, inner, below = around(exit_layer)
    stripline = ls.Stripline(width=0.10e-3, thickness=inner.thickness, conductor=inner.conductor,
                             height_below=below.thickness, dielectric_below=below.dielectric,
                             height_above=above.thickness, dielectric_above=above.dielectric)
    return [ls.TracePort("TOP", trace=microstrip, distance=distance),
            ls.TracePort(exit_layer, trace=stripline, distance=distance)]
