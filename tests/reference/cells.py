"""Full-wave reference cells (tests/data/axisym) as stackups and vias of the library."""

import json
from pathlib import Path

import libstub as ls

DATA = Path(__file__).resolve().parents[1] / "data" / "axisym"


def cases():
    """(case, result) of every cell."""
    results = {r["id"]: r for r in json.loads((DATA / "results.json").read_text(encoding="utf-8"))["results"]}
    return [(case, results[case["id"]]) for case in json.loads((DATA / "cases.json").read_text(encoding="utf-8"))["cases"]]


def via_of(case, f_ref):
    """The cell as a via. The signal connects at the top plane, whose lower face is the cell's reference plane. The cell's
    loss tangent is that of one frequency, the library's is causal: they meet at f_ref."""
    layers, pads, antipads = [], {}, {}
    for k, copper in enumerate(case["copper"]):
        if k > 0:
            own = case["layers"][k - 1]
            laminate = ls.Dielectric(own["eps_z"], own["tand"], in_plane_ratio=own["eps_rho"] / own["eps_z"], f_ref=f_ref)
            layers.append(ls.Layer(f"D{k}", "dielectric", own["h"], dielectric=laminate))
        name = f"C{k}"
        layers.append(ls.Layer(name, "plane" if copper["present"] else "signal", copper["t"]))
        if k > 0:
            pads[name] = 2 * copper["pad"] if copper["pad"] else 0.0
            if copper["present"]:
                antipads[name] = 2 * copper["antipad"]
    board = ls.Stackup(layers)
    returns = ls.Wall(case["wall"]["r"]) if case["wall"]["type"] == "pec" else None
    drills, end = [], case["end"]
    if end["type"] == "drill":
        left = board.depth("C0").bottom + end["L"]
        drills = [ls.BackDrill("bottom", board.depth(f"C{len(case['copper']) - 1}").bottom - left, 2 * end["rd"])]
    return ls.Via(board, drill=2 * case["a"], connects=("C0",), pads=pads, antipads=antipads, returns=returns, backdrills=drills)
