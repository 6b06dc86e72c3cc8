#!/usr/bin/env python3
"""Writes the error tables of docs/theory.md and README.md: the library's fidelities against full-wave reference data.

    make_error_table.py [FOLDER] [--check]

FOLDER has cases.json, results.json, capacitance.json and curves/; without it: tests/data/axisym. Three-dimensional transitions are
those of tests/data/fdtd3d. Tables go between lines
`<!-- table NAME: ... -->` and `<!-- end -->`. --check writes nothing and fails where a table is stale. Needs the Python package.
"""
import bisect
import csv
import json
import math
import re
import sys
import warnings
from pathlib import Path
from statistics import median

import libstub as ls

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT / "tests" / "reference"))
sys.dont_write_bytecode = True
import transitions  # noqa: E402  three-dimensional ones
from cells import via_of  # noqa: E402  a cell of the reference as a via of the library
from evaluate_transitions import Run  # noqa: E402  a transition of the reference as a network of the library

FIDELITIES = {"bulk": "quarter wave in the laminate's Dk", "loaded": "loaded barrel, a uniform line",
              "ladder": "ladder of cavities, for sweeps", "cavity": "radial modes in every cavity (the default)"}
RANGE = 110e9           # Hz; the reference curves end here


def percent(value, digits=1):
    return f"{100 * value:+.{digits}f}" if value is not None else "-"


def size(value):
    """A size in percent with two significant digits."""
    value = 100 * abs(value)
    return f"{value:.0f} %" if value >= 10 else f"{value:.1f} %" if value >= 1 else f"{value:.2f} %"


def summary(errors):
    sizes = [abs(e) for e in errors]
    return f"{size(median(sizes))} | {size(max(sizes))}"


def measure(cases, results):
    """Per fidelity: a dict per cell with the errors of its first and second notch, its own estimate, whether in range."""
    found = {fidelity: [] for fidelity in FIDELITIES}
    for case in cases:
        ref = results[case["id"]]
        via = via_of(case, ref["f1_Hz"])
        for fidelity in FIDELITIES:
            model = via.model(fidelity=fidelity)
            notches = model.notches(200e9 if fidelity in ("ladder", "cavity") else 400e9)
            more = None
            if len(ref["f_notch_Hz"]) > 1 and ref["f_notch_Hz"][1] < RANGE and len(notches) > 1:
                more = notches[1].f / ref["f_notch_Hz"][1] - 1
            found[fidelity].append({"first": notches[0].f / ref["f1_Hz"] - 1, "second": more, "estimate": notches[0].error,
                                    "inside": notches[0].f <= model.line().f_range})
    return found


def notch_tables(cases, results):
    """Cell by cell, and in short."""
    found = measure(cases, results)
    rows = []
    for i, case in enumerate(cases):
        ref = results[case["id"]]
        line = {fidelity: found[fidelity][i] for fidelity in FIDELITIES}
        rows.append(f"| {case['id']} | {case['note']} | {ref['L_m'] * 1e3:.2f} | {ref['f1_Hz'] / 1e9:.2f} | "
                    f"{percent(line['bulk']['first'])} | {percent(line['loaded']['first'])}{'' if line['loaded']['inside'] else ' *'} | "
                    f"{percent(line['ladder']['first'])} | {percent(line['cavity']['first'], 2)} | {100 * line['cavity']['estimate']:.2f} | "
                    f"{percent(line['loaded']['second'])} | {percent(line['ladder']['second'])} | {percent(line['cavity']['second'], 2)} |")
    cells = ["| cell | | stub, mm | first notch, GHz | `bulk`, % | `loaded`, % | `ladder`, % | `cavity`, % | its estimate, % "
             "| second: `loaded`, % | `ladder`, % | `cavity`, % |", "|---|---|---|---|---|---|---|---|---|---|---|---|", *rows]
    short = ["| first notch, 24 full-wave cells | median error | largest error |", "|---|---|---|"]
    short += [f"| `{fidelity}`: {words} | {summary([c['first'] for c in found[fidelity]])} |" for fidelity, words in FIDELITIES.items()]
    second = ["| second notch | cells | median error | largest error |", "|---|---|---|---|"]
    for fidelity in FIDELITIES:
        errors = [c["second"] for c in found[fidelity] if c["second"] is not None]
        second.append(f"| `{fidelity}` | {len(errors)} | {summary(errors)} |")
    return {"cells": cells, "short": short, "second": second}


def loss_at(folder, name, f):
    """Loss at f by the reference curve, dB, linear between its points."""
    rows = [[float(x) for x in row] for row in csv.reader(open(folder / "curves" / f"{name}.csv")) if row[0][0].isdigit()]
    points = [(row[0], -20 * math.log10(math.hypot(row[5], row[6]))) for row in rows]
    for (x0, y0), (x1, y1) in zip(points, points[1:]):
        if x0 <= f <= x1:
            return y0 + (y1 - y0) * (f - x0) / (x1 - x0)
    raise ValueError(f"{name}: no curve at {f} Hz")


def loss_table(cases, results, folder):
    text = ["| loss added at half the first notch | median error | largest errors | reference |", "|---|---|---|---|"]
    for fidelity in FIDELITIES:
        errors, losses = [], []
        for case in cases:
            ref = results[case["id"]]
            f = 0.5 * ref["f1_Hz"]
            losses.append(loss_at(folder, case["id"], f))
            errors.append(via_of(case, ref["f1_Hz"]).model(fidelity=fidelity).added_loss(f) - losses[-1])
        text.append(f"| `{fidelity}` | {median(map(abs, errors)):.3f} dB | {min(errors):+.3f} to {max(errors):+.3f} dB | "
                    f"{min(losses):.2f} to {max(losses):.2f} dB |")
    return text


def capacitance_table(entries):
    """The sum of lstub_plate_capacitance for both planes, with the coaxial line in the plane, against electrostatics."""
    errors = []
    for e in entries:
        cavity = 2 * ls.plate_capacitance(2 * e["a"], 2 * e["antipad"], e["h"], e["eps_z"], e["eps_rho"])
        plane = ls.coax(2 * e["a"], 2 * e["antipad"], e["eps_rho"]).capacitance * e["t"]
        errors.append((cavity + plane) / e["C_cell_F"] - 1)
    return ["| capacitance per cavity cell | cells | smallest error | median error | largest error |", "|---|---|---|---|---|",
            f"| via-plate sum and plane against electrostatic finite elements | {len(errors)} | {100 * min(errors):+.1f} % | "
            f"{100 * median(errors):+.1f} % | {100 * max(errors):+.1f} % |"]


def curves_of(path):
    """Frequencies of a reference curve, and its columns NAMEre, NAMEim as complex numbers by name."""
    rows = list(csv.DictReader(open(path, encoding="ascii", newline="")))
    names = [key[:-2] for key in rows[0] if key.endswith("re")]
    return [float(row["f_Hz"]) for row in rows], {n: [complex(float(row[n + "re"]), float(row[n + "im"])) for row in rows] for n in names}


def at(f, grid, values):
    """Linear between the points of a rising grid; None outside."""
    if not grid[0] <= f <= grid[-1]:
        return None
    i = min(bisect.bisect_right(grid, f), len(grid) - 1)
    return values[i - 1] + (values[i] - values[i - 1]) * (f - grid[i - 1]) / (grid[i] - grid[i - 1])


def curve_errors(run, ref):
    """Largest differences of |S21| (dB) and of S11 up to 0.7 of the first notch, to 40 GHz without one. The reference's frequencies
    are scaled by what the rims of its grid shift the notch."""
    f, curves = curves_of(transitions.DATA / "curves" / f"{run.case['id']}.csv")
    scale, top = (ref["f1_Hz"] / ref["f1_raw_Hz"], 0.7 * ref["f1_Hz"]) if "f1_Hz" in ref else (1.0, 40e9)
    through, back = 0.0, 0.0
    for x, s21, s11 in zip(f, curves["S21"], curves["S11"]):
        s = at(x * scale, run.f, [matrix[1][0] for matrix in run.s]) if x * scale <= top else None
        if s is not None:
            through = max(through, abs(20 * math.log10(abs(s) / abs(s21))))
            back = max(back, abs(at(x * scale, run.f, [matrix[0][0] for matrix in run.s]) - s11))
    return through, back


def transition_table(text, kept):
    """Three-dimensional transitions as networks, and the first notch of the stub alone."""
    for case, ref in transitions.cases():
        if case["trace"] is None or not kept(ref):
            continue
        run = Run(case)
        through, back = curve_errors(run, ref)
        row = f"| {case['id']} | {case['note']} |"
        if "f1_Hz" in ref:
            alone, notch = transitions.via_of(case).model().notches(60e9)[0], run.notches[0]
            row += (f" {ref['f1_Hz'] / 1e9:.3f} | {percent(alone.f / ref['f1_Hz'] - 1, 2)} | {percent(notch.f / ref['f1_Hz'] - 1, 2)} | "
                    f"{notch.depth_db:.1f} | {ref['f1_depth_dB']:.1f} |")
        text.append(f"{row} {through:.2f} | {back:.3f} |")
    return text


def unequal_table():
    """The pair of unequal barrels: what the wave in one port becomes, and mode conversion."""
    case = json.loads((transitions.DATA / "unequal_pair" / "case.json").read_text(encoding="utf-8"))
    f, curves = curves_of(transitions.DATA / "unequal_pair" / "curves.csv")
    run = Run(case)
    kinds = {"reflection": ("S1A_1A", "S1B_1B"), "transmission": ("S2A_1A", "S2B_1B"),
             "to the other barrel": ("S1B_1A", "S1A_1B", "S2B_1A", "S2A_1B")}
    place, text = {name: (i, j) for i, j, name in run.names()}, ["| unequal pair, to 40 GHz | largest difference |", "|---|---|"]
    for kind, names in kinds.items():
        worst = max(abs(run.s[k][place[n][0]][place[n][1]] - curves[n][k]) for n in names for k, x in enumerate(f) if x <= 40e9)
        text.append(f"| {kind}: {', '.join(n.replace('_', ',') for n in names)} | {worst:.3f} |")
    mixed = ls.to_mixed(run.s, [(0, 2), (1, 3)], z=transitions.transition_of(case).reference).s
    text += ["", "| common wave out of the traces for a differential one in, Scd21 | full wave, dB | difference, dB |", "|---|---|---|"]
    for x in (5e9, 10e9, 20e9, 30e9, 35e9):
        k = f.index(x)
        ref = 20 * math.log10(abs(0.5 * sum(sign * curves[n][k] for n, sign in (("S2A_1A", 1), ("S2A_1B", -1), ("S2B_1A", 1), ("S2B_1B", -1)))))
        text.append(f"| {x / 1e9:.0f} GHz | {ref:.1f} | {20 * math.log10(abs(mixed[k][3][0])) - ref:+.2f} |")
    return text


def make_tables(folder):
    cases = json.loads((folder / "cases.json").read_text())["cases"]
    results = {r["id"]: r for r in json.loads((folder / "results.json").read_text())["results"]}
    capacitances = json.loads((folder / "capacitance.json").read_text())["results"]
    return {**notch_tables(cases, results), "loss": loss_table(cases, results, folder),
            "capacitance": capacitance_table(capacitances), "unequal": unequal_table(),
            "transitions": transition_table(
                ["| transition | | first notch, GHz | stub alone, % | whole, % | depth, dB | full wave, dB | \\|S21\\|, dB | S11 |",
                 "|---|---|---|---|---|---|---|---|---|"], lambda ref: "f1_Hz" in ref),
            "stubless": transition_table(["| without a notch | | \\|S21\\|, dB | S11 |", "|---|---|---|---|"], lambda ref: "f1_Hz" not in ref)}


def fill(text, tables, found):
    def replace(match):
        found.add(match[2])
        return match[1] + "\n".join(tables.get(match[2], ["no such table"])) + "\n" + match[3]
    return re.sub(r"(<!-- table (\w+):[^\n]*-->\n).*?(<!-- end -->)", replace, text, flags=re.S)


def main(arguments):
    check = "--check" in arguments
    folders = [a for a in arguments if a != "--check"]
    folder = Path(folders[0]) if folders else ROOT / "tests/data/axisym"
    warnings.simplefilter("ignore", ls.RangeWarning)
    tables, found, stale = make_tables(folder), set(), []
    for name in ("README.md", "docs/theory.md"):
        path = ROOT / name
        old = path.read_text(encoding="utf-8")
        new = fill(old, tables, found)
        if new != old and check:
            stale.append(name)
        elif new != old:
            path.write_text(new, encoding="utf-8")
            print(f"wrote {name}")
    missing = set(tables) - found
    for name in stale:
        print(f"{name}: a table is stale: run docs/make_error_table.py and commit what it writes")
    for name in missing:
        print(f"no page has a place for the table '{name}'")
    print(f"{len(found & set(tables))} tables, {len(stale) + len(missing)} wrong")
    return 1 if stale or missing else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
