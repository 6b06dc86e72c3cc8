"""Three-dimensional reference transitions (schema of tests/data/fdtd3d/cases.json) as stackups, vias and networks of the library.

Where the schema can say what the library cannot: return vias of several radii get the geometric mean, and where one barrel of a
pair is drilled and the other cut short, what fills the hole fills the space below the cut, too.
"""

import json
import math
from pathlib import Path

import libstub as ls

DATA = Path(__file__).resolve().parents[1] / "data" / "fdtd3d"
F_LOSS = 20e9                   # where tan d is 0.005
SAME = 1e-9                     # m: depths nearer than that are one
LEAST_STUB = 1e-6               # m: of a barrel cut at the trace, whose partner goes on


def cases():
    """(case, result) of every transition."""
    results = {r["id"]: r for r in json.loads((DATA / "results.json").read_text(encoding="utf-8"))["results"]}
    return [(case, results[case["id"]]) for case in json.loads((DATA / "cases.json").read_text(encoding="utf-8"))["cases"]]


def loss_tangent(case, f=F_LOSS):
    return case["sigma_S_per_m"] / (2 * math.pi * f * 8.8541878128e-12 * case["eps_r"])


class Levels:
    """The copper levels of a case as a stackup without copper thickness: planes, and layers for trace, bottom and pads."""

    def __init__(self, case, f_ref=F_LOSS):
        self.planes = _distinct(case["planes_depth"])
        others = [case["board_depth"], *(pad["depth"] for pad in case["pads"])]
        if case["trace"] is not None:
            others.append(case["trace"]["depth"])
        self.depths = _distinct(self.planes + [depth for depth in others if self._plane(depth) is None])
        if self.depths[0] < self.planes[0]:
            raise ValueError(f"copper at depth {self.depths[0]} lies above the top plane, at {self.planes[0]}")
        laminate = ls.Dielectric(case["eps_r"], loss_tangent(case, f_ref), f_ref=f_ref)
        layers = []
        for i, depth in enumerate(self.depths):
            if i > 0:
                layers.append(ls.Layer(f"D{i}", "dielectric", depth - self.depths[i - 1], dielectric=laminate))
            layers.append(ls.Layer(self._label(i), "signal" if self._plane(depth) is None else "plane", 0.0))
        self.stackup = ls.Stackup(layers)
        self.top, self.bottom = self._label(0), self.depths[-1]

    def _plane(self, depth):
        return next((plane for plane in self.planes if abs(plane - depth) <= SAME), None)

    def _label(self, i):
        return f"{'S' if self._plane(self.depths[i]) is None else 'P'}{i}"

    def name(self, depth):
        return next(self._label(i) for i, level in enumerate(self.depths) if abs(level - depth) <= SAME)

    def span(self, first, last):
        """The outermost planes between two depths; None where there are fewer than two, and nothing is joined."""
        joined = [plane for plane in self.planes if first - SAME <= plane <= last + SAME]
        return (self.name(joined[0]), self.name(joined[-1])) if len(joined) > 1 else None


def _distinct(depths):
    result = []
    for depth in sorted(depths):
        if not result or depth - result[-1] > SAME:
            result.append(depth)
    return result


# ---- ends of barrels --------------------------------------------------------------------------------


def _is_at_trace(case, end):
    return end["type"] == "cut" and case["trace"] is not None and abs(end["depth"] - case["trace"]["depth"]) <= SAME


def _ends(case):
    """The ends of the barrels: one, or two where the partner has its own."""
    own = [case["end"]]
    if case["pair"] is not None and case["pair"].get("partner_end") is not None:
        own.append(case["pair"]["partner_end"])
    return own


def stubs_of(case):
    return "removed" if all(_is_at_trace(case, end) for end in _ends(case)) else "kept"


def _drills(case, levels, end):
    if end["type"] == "through" or stubs_of(case) == "removed":
        return []
    if end["type"] == "drill":
        return [ls.BackDrill("bottom", levels.bottom - end["depth"], 2 * end["hole_radius"])]
    if end["type"] != "cut":
        raise ValueError(f"end: type {end['type']!r} is not known")
    depth = end["depth"] + (LEAST_STUB if _is_at_trace(case, end) else 0.0)
    return [ls.BackDrill("bottom", levels.bottom - depth, 2 * case["barrel_radius"])]


def _hole_dk(case):
    """Of what fills the holes: below a barrel that is cut short, the laminate."""
    fills = [end["eps_fill"] for end in _ends(case) if end["type"] == "drill"]
    if fills:
        return fills[0]
    return case["eps_r"] if any(end["type"] == "cut" for end in _ends(case)) else 1.0


# ---- barrels, return vias, lines --------------------------------------------------------------------


def via_of(case, levels=None):
    """The barrel, entered through the opening of the top plane and left by the trace; copper is without thickness."""
    levels = levels or Levels(case)
    trace, shape = case["trace"], case["antipad"]["shape"]
    if shape not in ("round", "slot"):
        raise ValueError(f"antipad: shape {shape!r} is not known")
    returns, pair = _around(case, levels)
    return ls.Via(
        levels.stackup, drill=2 * case["barrel_radius"], connects=(levels.top,) if trace is None else (levels.top, levels.name(trace["depth"])),
        pads={levels.name(pad["depth"]): 2 * pad["radius"] for pad in case["pads"]}, antipad=2 * case["antipad"]["radius"],
        antipads={levels.top: 2 * case["feed"]["mouth_radius"]}, returns=returns, pair=pair,
        backdrills=_drills(case, levels, case["end"]), hole_dk=_hole_dk(case))


def _around(case, levels):
    """Return vias and partner, turned so that the partner stands where the library has it, on the x axis."""
    pair, angle = None, 0.0
    if case["pair"] is not None:
        x, y = case["pair"]["partner"]
        angle = -math.atan2(y, x)
        ends = _ends(case)
        own = _drills(case, levels, ends[1]) if len(ends) > 1 and stubs_of(case) == "kept" else None
        pair = ls.Pair(math.hypot(x, y), shared=case["antipad"]["shape"] == "slot", backdrills=own)
    vias, c, s = [], math.cos(angle), math.sin(angle)
    for via in case["return_vias"]:
        span = levels.span(via["from_depth"], via["to_depth"])
        if span is not None:
            vias.append(((c * via["x"] - s * via["y"], s * via["x"] + c * via["y"]), via["radius"], span))
    if not vias:
        return None, pair
    radius = math.exp(sum(math.log(radius) for _, radius, _ in vias) / len(vias))
    return ls.Vias([place for place, _, _ in vias], 2 * radius, [span for _, _, span in vias]), pair


def transition_of(case, f_ref=F_LOSS, annuli=None):
    """The whole as a network: port 1 the coaxial line above the top plane, port 2 the trace; of a pair those of both barrels."""
    levels, trace = Levels(case, f_ref), case["trace"]
    ports = [ls.CoaxPort(levels.top, dk=case["feed"]["eps_r"], z_ref=case["feed"].get("Z0", 50.0))]
    if trace is not None:
        ports.append(ls.TracePort(
            levels.name(trace["depth"]), impedance=trace["line_impedance"], dk=case["eps_r"], loss_tangent=loss_tangent(case, f_ref),
            width=trace.get("width"), distance=trace["reference_x"], z_ref=trace["line_impedance"]))
    return ls.Transition(via_of(case, levels), ports, stubs=stubs_of(case), metal="perfect", annuli=annuli)
