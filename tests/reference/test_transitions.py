"""Three-dimensional full-wave transitions against the library: first notches of the stub alone and of the whole network, its
S-parameters, an unequal pair, the case without a trace; and the script that runs any file of them."""

import copy
import csv
import functools
import json
import math
import statistics
import subprocess
import sys
import warnings
from pathlib import Path

import pytest

import libstub as ls
from evaluate_transitions import Run, zeros
from transitions import DATA, cases, loss_tangent, via_of

np = pytest.importorskip("numpy")

HERE = Path(__file__).resolve().parent
ALL = cases()
WITH_NOTCH = [(case, result) for case, result in ALL if "f1_Hz" in result]
WITH_TRACE = [(case, result) for case, result in ALL if case["trace"] is not None]
UNEQUAL = json.loads((DATA / "unequal_pair" / "case.json").read_text(encoding="utf-8"))


def told(capsys, text):
    with capsys.disabled():
        print(f"\n{text}", end=" ")


def summary(name, errors, unit, scale=1.0):
    worst = max(errors, key=lambda key: abs(errors[key]))
    median = statistics.median(map(abs, errors.values()))
    return f"{name} of {len(errors)}: worst {scale * errors[worst]:+.3f} {unit} ({worst}), median {scale * median:.3f} {unit}"


# ---- the stub alone ------------------------------------------------------------------------------------


def limit_of(case):
    """What the model of the stub claims, by kind of transition. Without return vias near, the current on the pads and the trace that
    leaves matter, and this model has neither: -1.9 % found, the shortfall is stated."""
    if case["pair"] is not None:
        return 0.008
    return 0.005 if case["return_vias"] else 0.025


def test_kinds_are_all_here():
    assert len(ALL) == 21
    kinds = [(case["pair"] is not None, bool(case["return_vias"])) for case, _ in WITH_NOTCH]
    assert kinds.count((False, True)) >= 6 and kinds.count((False, False)) >= 1 and kinds.count((True, True)) >= 5
    assert (True, False) in kinds


@pytest.mark.parametrize("case, result", WITH_NOTCH, ids=[case["id"] for case, _ in WITH_NOTCH])
def test_first_notch_of_the_stub(capsys, case, result):
    assert loss_tangent(case) == pytest.approx(0.005, rel=1e-6)
    model = via_of(case).model()
    assert model.stubs[-1].length == pytest.approx(case["stub_length"], rel=1e-9)
    f1 = model.notches(up_to=60e9)[0].f
    error = f1 / result["f1_Hz"] - 1
    told(capsys, f"{case['id']}, {case['note']}: {f1 / 1e9:.3f} GHz, off by {100 * error:+.2f} %")
    assert abs(error) <= limit_of(case)


def test_whole_barrel():
    """The case without a trace: both zeros of the reactance, which the reference itself knows to half a percent."""
    case, result = next((case, result) for case, result in ALL if case["id"] == "c_gnd")
    found = [notch.f_series for notch in via_of(case).model().notches(up_to=60e9)]
    assert len(found) >= len(result["f_series_Hz"]) == 2
    for f, wanted in zip(found, result["f_series_Hz"]):
        assert abs(f / wanted - 1) <= 0.005 + result["uncertainty_rel"]
    again = zeros(run("c_gnd"))
    assert len(again) == 2
    for f, wanted in zip(again, result["f_series_Hz"]):
        assert abs(f / wanted - 1) <= 0.005 + result["uncertainty_rel"]


# ---- the whole network ---------------------------------------------------------------------------------


@functools.lru_cache(maxsize=None)
def run(name):
    case = UNEQUAL if name == UNEQUAL["id"] else next(case for case, _ in ALL if case["id"] == name)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ls.RangeWarning)
        return Run(case)


def reference(path):
    """Frequencies, and curves by name."""
    with open(path, encoding="ascii", newline="") as file:
        rows = list(csv.DictReader(file))
    names = [key[:-2] for key in rows[0] if key.endswith("re")]
    return np.array([float(row["f_Hz"]) for row in rows]), {
        name: np.array([complex(float(row[name + "re"]), float(row[name + "im"])) for row in rows]) for name in names}


def at(f, grid, values):
    return np.interp(f, grid, values.real) + 1j * np.interp(f, grid, values.imag)


def frequency_limit(case):
    return 0.005 if case["pair"] is None else {"odd": 0.008, "even": 0.015}[case["pair"]["mode"]]


def test_first_notches(capsys):
    errors, over = {}, {}
    for case, result in WITH_NOTCH:
        error = run(case["id"]).notches[0].f / result["f1_Hz"] - 1
        errors[case["id"]] = error
        if abs(error) > frequency_limit(case) + result["f1_uncertainty_rel"]:
            over[case["id"]] = error
    told(capsys, summary("first notch", errors, "%", 100.0))
    assert over == {} and len(errors) == 13
    assert statistics.median(map(abs, errors.values())) <= 0.001


def test_depths(capsys):
    errors = {case["id"]: run(case["id"]).notches[0].depth_db - result["f1_depth_dB"] for case, result in WITH_NOTCH}
    told(capsys, summary("depth", errors, "dB"))
    assert {name: error for name, error in errors.items() if abs(error) > 2.0} == {}


def curve_errors(case, result):
    """Largest differences of |S21| (dB) and S11 below 0.7 f1, below 40 GHz where there is no notch. The curves are of a staircased
    mesh; their frequencies are scaled by what that shifts the first notch."""
    f, curves = reference(DATA / "curves" / f"{case['id']}.csv")
    mine, own = run(case["id"]), np.array(run(case["id"]).f)
    s = np.array(mine.s)
    f = f * result["f1_Hz"] / result["f1_raw_Hz"] if "f1_Hz" in result else f
    near = (f >= own[0]) & (f <= (0.7 * result["f1_Hz"] if "f1_Hz" in result else 40e9))
    through = 20 * np.log10(np.abs(at(f, own, s[:, 1, 0])) / np.abs(curves["S21"]))
    return np.abs(through[near]).max(), np.abs(at(f, own, s[:, 0, 0]) - curves["S11"])[near].max()


def test_curves(capsys):
    """Where there is no notch the curves are compared up to 40 GHz, farther than a limit was set for; there the slot without a
    stub is 0.065 off in S11."""
    through, back = {}, {}
    for case, result in WITH_TRACE:
        through[case["id"]], back[case["id"]] = curve_errors(case, result)
    told(capsys, summary("|S21|", through, "dB"))
    told(capsys, summary("S11", back, ""))
    stubless = {case["id"] for case, result in WITH_TRACE if "f1_Hz" not in result}
    assert len(stubless) == 7 and {name: e for name, e in through.items() if e > 0.3} == {}
    assert {name: e for name, e in back.items() if e > (0.07 if name == "ndo_k5" else 0.05)} == {}
    assert max(through[name] for name in stubless) <= 0.15


def test_no_notch_where_there_is_none():
    for case, result in WITH_TRACE:
        if "f1_Hz" not in result:
            assert run(case["id"]).notches == []


def test_all_are_passive_and_reciprocal():
    for case, _ in ALL + [(UNEQUAL, None)]:
        s = np.array(run(case["id"]).s)
        assert ls.passivity(s).max() <= 1 + 1e-12 and ls.reciprocity(s).max() <= 1e-11


def test_unequal_pair(capsys):
    f, curves = reference(DATA / "unequal_pair" / "curves.csv")
    mine = run(UNEQUAL["id"])
    s = np.array(mine.s)[: f.size]
    assert list(f) == mine.f[: f.size] and {name for _, _, name in mine.names()} == set(curves)
    errors = {name: np.abs(s[:, i, j] - curves[name])[f <= 40e9].max() for i, j, name in mine.names()}
    told(capsys, summary("unequal pair, S", errors, ""))
    assert {name: e for name, e in errors.items() if e > 0.05} == {}

    def common_from_differential(two_a, two_b):
        return 0.5 * (two_a["1A"] - two_a["1B"] + two_b["1A"] - two_b["1B"])

    wanted = common_from_differential(*({end: curves[f"S{to}_{end}"] for end in ("1A", "1B")} for to in ("2A", "2B")))
    mixed = ls.to_mixed(s, [(0, 2), (1, 3)], z=mine.transition.reference).s
    off = np.abs(20 * np.log10(np.abs(mixed[:, 3, 0]) / np.abs(wanted)))[f <= 30e9]
    told(capsys, f"mode conversion to 30 GHz within {off.max():.2f} dB")
    assert off.max() <= 1.0


# ---- the script ----------------------------------------------------------------------------------------


def evaluate(*arguments):
    script = HERE / "evaluate_transitions.py"
    done = subprocess.run([sys.executable, "-B", script, *arguments], capture_output=True, text=True, timeout=300)
    return done.returncode, done.stdout, done.stderr


def results_of(path, *arguments):
    status, text, errors = evaluate(path, *arguments)
    assert status == 0 and errors == ""
    return {result["id"]: result for result in json.loads(text)["results"]}


def by_name(name, **changes):
    case = copy.deepcopy(next(case for case, _ in ALL if case["id"] == name))
    return {**case, **changes}


def test_script(tmp_path):
    """Good cases beside bad ones, and curves with the columns and frequencies of the reference."""
    path, curves = tmp_path / "some.json", tmp_path / "curves"
    bad = [by_name("s_k4", id="bad", barrel_radius=0.0005), {"id": "short", "eps_r": 3.5}, 7, by_name("s_k4", id="../x"),
           by_name("s_k4", id="kind", end={"type": "melted", "depth": 0.0019})]
    good = [by_name(name) for name in ("s_k4", "d_k5", "n_k4", "c_gnd", "bd_k4")] + [UNEQUAL]
    path.write_text(json.dumps({"cases": bad[:3] + good + bad[3:]}))
    found = results_of(path, "--curves", curves)
    assert [*found] == ["bad", "short", "case 2", *(case["id"] for case in good), "../x", "kind"]
    for name in ("bad", "short", "case 2", "../x", "kind"):
        assert found[name]["error"] and found[name]["f1_Hz"] is found[name]["f1_depth_dB"] is None and found[name]["f_series_Hz"] == []
    assert "missing" in found["short"]["error"] and "melted" in found["kind"]["error"]
    for case in good:
        result = found[case["id"]]
        assert set(result) == {"id", "f1_Hz", "f1_depth_dB", "f_series_Hz", "error"} and result["error"] is None
        own = (curves / f"{case['id']}.csv").read_text().splitlines()
        source = DATA / "unequal_pair" / "curves.csv" if case is UNEQUAL else DATA / "curves" / f"{case['id']}.csv"
        wanted = source.read_text().splitlines()
        assert own[0] == wanted[0] and len(own) == 266
        assert [float(line.split(",")[0]) for line in own[1:]] == [1e9 + 0.25e9 * i for i in range(265)]
    assert sorted(p.stem for p in curves.iterdir()) == sorted(case["id"] for case in good)
    assert found["s_k4"]["f1_Hz"] == run("s_k4").notches[0].f and found["n_k4"]["f1_Hz"] is found["bd_k4"]["f1_Hz"] is None
    assert found["c_gnd"]["f1_Hz"] is None and found["c_gnd"]["f_series_Hz"] == pytest.approx(zeros(run("c_gnd")), rel=1e-8)
    assert found["unequal_pair"]["f1_Hz"] == run("unequal_pair").notches[0].f


def test_script_takes_a_list_or_one_case(tmp_path):
    path = tmp_path / "one.json"
    path.write_text(json.dumps([by_name("s_k6")]))
    wanted = results_of(path)
    path.write_text(json.dumps(by_name("s_k6")))
    assert results_of(path) == wanted and wanted["s_k6"]["error"] is None
    for text in ("{", "3", '{"cases": 3}'):
        path.write_text(text)
        status, text, errors = evaluate(path)
        assert status == 1 and text == "" and "one.json" in errors


def turned(case, degrees):
    """Partner and return vias turned about the barrel."""
    c, s = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
    case = copy.deepcopy(case)
    x, y = case["pair"]["partner"]
    case["pair"]["partner"] = [c * x - s * y, s * x + c * y]
    for via in case["return_vias"]:
        via["x"], via["y"] = c * via["x"] - s * via["y"], s * via["x"] + c * via["y"]
    return {**case, "id": "turned"}


def test_other_geometry_of_the_schema(tmp_path):
    """What the 21 cases do not have: other directions, spans, ends, pads and bottoms."""
    vias = by_name("s_k4")["return_vias"]
    half = [dict(via, to_depth=0.001) for via in vias[:2]] + vias[2:]
    path, near = tmp_path / "other.json", {"depth": 0.00131, "radius": 0.0003}
    path.write_text(json.dumps([
        turned(by_name("d_k5"), 33.0),
        by_name("d_k5", id="even", pair={"mode": "even", "partner": [0.0, -0.0009]}),
        by_name("s_k4", id="spans", return_vias=half),
        by_name("s_k4", id="order", planes_depth=by_name("s_k4")["planes_depth"][::-1]),
        by_name("s_k4", id="pad", pads=by_name("s_k4")["pads"] + [near]),
        by_name("s_k4", id="cut", end={"type": "cut", "depth": 0.0013}, pads=by_name("n_k4")["pads"]),
        by_name("bd_k4", id="filled", end={"type": "drill", "depth": 0.0013, "hole_radius": 0.00025, "eps_fill": 3.5}),
        by_name("s_k4", id="thin", board_depth=0.0018, end={"type": "through", "depth": 0.0018},
                pads=[{"depth": depth, "radius": 0.000225} for depth in (0.0007, 0.0018)]),
        by_name("s_k4", id="deep", planes_depth=[0.0002 * i for i in range(6)], return_vias=[dict(via, to_depth=0.001) for via in vias]),
        by_name("d_k5", id="dark", trace=None, pads=[{"depth": 0.0019, "radius": 0.000225}]),
        dict(UNEQUAL, id="equal", pair={"mode": None, "partner": UNEQUAL["pair"]["partner"]}),
        dict(UNEQUAL, id="drilled", pair=dict(UNEQUAL["pair"], partner_end={"type": "drill", "depth": 0.0012, "hole_radius": 0.0002,
                                                                           "eps_fill": 1.0})),
        dict(UNEQUAL, id="at_trace", pair=dict(UNEQUAL["pair"], partner_end={"type": "cut", "depth": 0.0009})),
    ]))
    found = results_of(path, "--curves", tmp_path)
    assert {name: result["error"] for name, result in found.items() if result["error"]} == {}
    plain = run("s_k4").notches[0]
    assert found["turned"]["f1_Hz"] == pytest.approx(run("d_k5").notches[0].f, rel=1e-9)
    assert found["order"]["f1_Hz"] == pytest.approx(plain.f, rel=1e-12)
    assert 0.55 < found["even"]["f1_Hz"] / found["turned"]["f1_Hz"] < 0.75
    assert found["spans"]["f1_Hz"] < 0.97 * plain.f and found["spans"]["f1_depth_dB"] > plain.depth_db + 6
    assert found["pad"]["f1_Hz"] < 0.95 * plain.f
    assert found["cut"]["f1_Hz"] == pytest.approx(found["filled"]["f1_Hz"], rel=0.005)
    assert found["thin"]["f1_Hz"] > 1.04 * plain.f and found["deep"]["f1_Hz"] > 1.2 * plain.f
    assert found["dark"]["f1_Hz"] is None and len(found["dark"]["f_series_Hz"]) == 2
    rows = list(csv.DictReader((tmp_path / "equal.csv").read_text().splitlines()))
    for row in rows[::20]:                              # equal barrels answer alike
        assert float(row["S1A_1Are"]) == pytest.approx(float(row["S1B_1Bre"]), abs=1e-7)
        assert float(row["S2B_1Aim"]) == pytest.approx(float(row["S2A_1Bim"]), abs=1e-7)
    assert found["at_trace"]["f1_Hz"] == pytest.approx(found["drilled"]["f1_Hz"], rel=0.01)     # A's own stub makes it
