"""Three-dimensional reference transitions (tests/data/fdtd3d) as stackups and vias of the library."""

import json
import math
from pathlib import Path

import libstub as ls

DATA = Path(__file__).resolve().parents[1] / "data" / "fdtd3d"
F_LOSS = 20e9                   # where tan d is 0.005


def cases():
    """(case, result) of every transition."""
    results = {r["id"]: r for r in json.loads((DATA / "results.json").read_text(encoding="utf-8"))["results"]}
    return [(case, results[case["id"]]) for case in json.loads((DATA / "cases.json").read_text(encoding="utf-8"))["cases"]]


def loss_tangent(case):
    return case["sigma_S_per_m"] / (2 * math.pi * F_LOSS * 8.8541878128e-12 * case["eps_r"])


def via_of(case):
    """The barrel, entered through the opening of the top plane and left by the trace; copper is without thickness."""
    laminate = ls.Dielectric(case["eps_r"], loss_tangent(case), f_ref=F_LOSS)
    trace = case["trace"]
    copper = {depth: "plane" for depth in case["planes_depth"]}
    copper[case["board_depth"]] = "signal"
    if trace is not None:
        copper[trace["depth"]] = "signal"
    depths, layers, names = sorted(copper), [], {}
    for i, depth in enumerate(depths):
        if i > 0:
            layers.append(ls.Layer(f"D{i}", "dielectric", depth - depths[i - 1], dielectric=laminate))
        names[depth] = f"{'P' if copper[depth] == 'plane' else 'S'}{i}"
        layers.append(ls.Layer(names[depth], copper[depth], 0.0))
    board = ls.Stackup(layers)
    top, end = names[depths[0]], case["end"]
    drills = []
    if end["type"] == "drill":
        drills = [ls.BackDrill("bottom", case["board_depth"] - end["depth"], 2 * end["hole_radius"])]
    returns, pair = _around(case)
    return ls.Via(
        board, drill=2 * case["barrel_radius"], connects=(top,) if trace is None else (top, names[trace["depth"]]),
        pads={names[pad["depth"]]: 2 * pad["radius"] for pad in case["pads"]}, antipad=2 * case["antipad"]["radius"],
        antipads={top: 2 * case["feed"]["mouth_radius"]}, returns=returns, pair=pair, backdrills=drills,
        hole_dk=end.get("eps_fill", 1.0))


def _around(case):
    """Return vias and partner, turned so that the partner stands where the library has it, on the x axis."""
    pair, angle = None, 0.0
    if case["pair"] is not None:
        x, y = case["pair"]["partner"]
        angle = -math.atan2(y, x)
        pair = ls.Pair(math.hypot(x, y), shared=case["antipad"]["shape"] == "slot")
    vias = case["return_vias"]
    if not vias:
        return None, pair
    c, s = math.cos(angle), math.sin(angle)
    places = [(c * v["x"] - s * v["y"], s * v["x"] + c * v["y"]) for v in vias]
    return ls.Vias(places, 2 * vias[0]["radius"]), pair
