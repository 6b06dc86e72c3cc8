#!/usr/bin/env python3
"""Writes the error tables of docs/theory.md and README.md: the library's fidelities against full-wave reference data.

    make_error_table.py [FOLDER] [--check]

FOLDER has cases.json, results.json, capacitance.json and curves/; without it: tests/data/axisym. Three-dimensional transitions are
those of tests/data/fdtd3d. Tables go between lines
`<!-- table NAME: ... -->` and `<!-- end -->`. --check writes nothing and fails where a table is stale. Needs the Python package.
"""
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


def transition_table():
    """Three-dimensional transitions, notch by notch, at the default fidelity."""
    text = ["| transition | | first notch, GHz | `cavity`, % | depth, dB | full wave, dB |", "|---|---|---|---|---|---|"]
    for case, ref in transitions.cases():
        if "f1_Hz" not in ref:
            continue
        notch = transitions.via_of(case).model().notches(60e9)[0]
        text.append(f"| {case['id']} | {case['note']} | {ref['f1_Hz'] / 1e9:.3f} | {percent(notch.f / ref['f1_Hz'] - 1, 2)} | "
                    f"{notch.depth_db:.1f} | {ref['f1_depth_dB']:.1f} |")
    return text


def make_tables(folder):
    cases = json.loads((folder / "cases.json").read_text())["cases"]
    results = {r["id"]: r for r in json.loads((folder / "results.json").read_text())["results"]}
    capacitances = json.loads((folder / "capacitance.json").read_text())["results"]
    return {**notch_tables(cases, results), "loss": loss_table(cases, results, folder), "transitions": transition_table(),
            "capacitance": capacitance_table(capacitances)}


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
