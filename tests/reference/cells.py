"""Full-wave reference cells (tests/data/axisym) as stackups and vias of the library."""

import json
from pathlib import Path

import libstub as ls

DATA = Path(__file__).resolve().parents[1] / "data" / "axisym"


def cases():
    """(case, result) of every cell."""
    results = {r["id"]: r for r in json.loads((DATA / "results.json").read_text(encoding="utf-8"))["results"]}
    return [(case, results[case["id"]]) for case in json.loads((DATA / "cases.json").read_text(encoding="utf-8"))["cases"]]


def via_of(case, f_ref, scale=1.0):
    """The cell as a via, its lengths times `scale`. The signal comes through the opening of the top plane, whose lower face
    is the cell's reference plane. The cell's loss tangent is that of every frequency, the library's is causal: they meet
    at f_ref."""
    layers, pads, antipads = [], {}, {}
    for k, copper in enumerate(case["copper"]):
        if k > 0:
            own = case["layers"][k - 1]
            laminate = ls.Dielectric(own["eps_z"], own["tand"], in_plane_ratio=own["eps_rho"] / own["eps_z"], f_ref=f_ref)
            layers.append(ls.Layer(f"D{k}", "dielectric", scale * own["h"], dielectric=laminate))
        name = f"C{k}"
        layers.append(ls.Layer(name, "plane" if copper["present"] else "signal", scale * copper["t"]))
        if k > 0:
            pads[name] = scale * 2 * copper["pad"] if copper["pad"] else 0.0
        if copper["present"]:
            antipads[name] = scale * 2 * copper["antipad"]
    board, below = ls.Stackup(layers), case["below"]
    return ls.Via(
        board, drill=scale * 2 * case["a"], connects=("C0",), pads=pads, antipads=antipads, returns=_returns(case["wall"], scale),
        backdrills=_drills(board, case, scale), hole_dk=case["end"].get("eps_fill", 1.0), outside_dk=below.get("eps", 1.0),
        lid_distance=scale * below["height"] if below["type"] == "lid" else None)


def _returns(wall, scale):
    if wall is None or wall["type"] in ("open", "none"):
        return None
    if wall["type"] == "vias":      # of random_cells.py alone
        return ls.Vias([(scale * x, scale * y) for x, y in wall["places"]], scale * 2 * wall["r"])
    if wall["type"] != "pec":
        raise ValueError(f"wall: type {wall['type']!r} is not known")
    return ls.Wall(scale * wall["r"])


def _drills(board, case, scale):
    end = case["end"]
    if end["type"] == "pad":
        return []
    if end["type"] != "drill":
        raise ValueError(f"end: type {end['type']!r} is not known")
    bottom = board.depth(f"C{len(case['copper']) - 1}").bottom
    return [ls.BackDrill("bottom", bottom - (board.depth("C0").bottom + scale * end["L"]), scale * 2 * end["rd"])]
