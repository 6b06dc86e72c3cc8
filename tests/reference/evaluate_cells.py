#!/usr/bin/env python3
"""Runs cells of the schema of tests/data/axisym/cases.json through the library, and prints what it finds as JSON.

    evaluate_cells.py CASES.json [--model NAME] [--curves DIR]

A cell that fails has its message in `error` and null for the numbers; the others are not touched by it. --model: a fidelity
(default: the library's). --curves writes DIR/ID.csv: Zin at the lower face of the top plane, S11 and S21 of the stub across
a line of 50 ohm, 0.5 to 100 GHz in steps of 0.5 GHz, or as far up as the model answers. Needs the Python package.
"""

import argparse
import json
import math
import sys
import warnings
from pathlib import Path

sys.dont_write_bytecode = True
import libstub as ls  # noqa: E402
from cells import via_of  # noqa: E402

FIDELITIES = ("default", "bulk", "loaded", "ladder", "cavity")
Z_REF = 50.0
NOTCH_RANGE = 200e9             # the cavity model looks no higher
STATED_RANGE = 110e9            # what is reported, unless the first notch lies beyond
SPEED_OF_LIGHT = 299792458.0
HEADER = "f_Hz,ReZin_ohm,ImZin_ohm,ReS11,ImS11,ReS21,ImS21"
NUMBERS = ("L_m", "f1_Hz", "f_series_Hz", "f_notch_Hz", "Dk_eff", "model", "error_estimate")


def model_of(case, fidelity):
    """The cell's model and its notches, the loss tangents met at the first of them."""
    f_ref = 20e9
    for _ in range(3):
        model = via_of(case, f_ref).model(fidelity=fidelity, z_ref=Z_REF)
        notches = model.notches(up_to=NOTCH_RANGE)
        lossy = any(layer["tand"] for layer in case["layers"])
        if not notches or not lossy or abs(notches[0].f / f_ref - 1) < 1e-3:
            break
        f_ref = min(notches[0].f, 1e11)     # the library's own range of f_ref
    return model, notches


def answered(model, grid):
    """Zin at the frequencies of a rising grid, as far up as the model answers at all."""
    try:
        return model.zin(grid).tolist()
    except ls.ArgumentError as error:
        if error.field != "freq" or error.index < 1:
            raise
        return model.zin(grid[:error.index]).tolist()


def zeros_up(model, notches, top):
    """Frequencies up to `top` where the reactance rises through zero: those that the notches name, and any between samples.
    Across a pole the reactance falls, so a rise through zero is a zero."""
    def reactance(f):
        return model.zin(f).imag

    found = [n.f_series for n in notches if math.isfinite(n.f_series)]
    step = 0.1e9
    grid = [step * i for i in range(1, int(top / step) + 1)]
    values = [z.imag for z in answered(model, grid)]
    for low, high, a, b in zip(grid, grid[1:], values, values[1:]):
        if a < 0.0 <= b and not any(low <= f <= high for f in found):
            found.append(_bisect(reactance, low, high))
    return sorted(f for f in found if f <= top)


def _bisect(function, low, high):
    while True:
        middle = 0.5 * (low + high)
        if not low < middle < high:
            return middle
        if function(middle) < 0.0:
            low = middle
        else:
            high = middle


def evaluate(case, fidelity):
    model, notches = model_of(case, fidelity)
    if not model.stubs:
        raise ValueError("the cell has no stub")
    if not notches:
        raise ValueError(f"no notch below {NOTCH_RANGE / 1e9:.0f} GHz")
    length, line = model.stubs[0].length, model.line(0)
    f1 = notches[0].f
    top = max(STATED_RANGE, f1)
    return model, {
        "id": case["id"], "L_m": length, "f1_Hz": f1, "f_series_Hz": zeros_up(model, notches, top),
        "f_notch_Hz": [n.f for n in notches if n.f <= top],
        "Dk_eff": (SPEED_OF_LIGHT / (4.0 * length * f1)) ** 2, "model": line.fidelity, "error_estimate": notches[0].error,
        "error": None,
    }


def write_curve(model, path):
    f = [0.5e9 * i for i in range(1, 201)]
    zin = answered(model, f)
    s21 = model.s21(f[:len(zin)]).tolist()
    with open(path, "w", encoding="ascii") as file:
        print(HEADER, file=file)
        for frequency, z, through in zip(f, zin, s21):
            back = through - 1.0            # of a shunt, whose voltage is both waves' sum
            print(",".join(f"{v:.7e}" for v in (frequency, z.real, z.imag, back.real, back.imag, through.real, through.imag)),
                  file=file)


def result_of(case, place, fidelity, curves):
    name = case.get("id", f"case {place}") if isinstance(case, dict) else f"case {place}"
    try:
        if not isinstance(name, str) or "/" in name or name.startswith("."):
            raise ValueError(f"id {name!r}: must be text that can name a file")
        model, result = evaluate(dict(case, id=name), fidelity)
        if curves is not None:
            write_curve(model, curves / f"{name}.csv")
        return result
    except Exception as error:              # whatever is wrong with this one, the rest goes on
        text = str(error)
        if isinstance(error, KeyError):
            text = f"{text} is missing"
        failed = dict.fromkeys(NUMBERS)
        failed.update(f_series_Hz=[], f_notch_Hz=[])
        return {"id": name, **failed, "error": f"{type(error).__name__}: {text}"}


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("cases", type=Path)
    parser.add_argument("--model", choices=FIDELITIES, default="default")
    parser.add_argument("--curves", type=Path)
    args = parser.parse_args()
    try:
        cases = json.loads(args.cases.read_text(encoding="utf-8"))["cases"]
        if not isinstance(cases, list):
            raise TypeError("'cases' is no list")
        if args.curves is not None:
            args.curves.mkdir(parents=True, exist_ok=True)
    except (OSError, ValueError, KeyError, TypeError) as error:
        print(f"evaluate_cells.py: {args.cases}: {error}", file=sys.stderr)
        return 1
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ls.RangeWarning)
        results = [result_of(case, i, args.model, args.curves) for i, case in enumerate(cases)]
    print(json.dumps({"results": results}, indent=1, allow_nan=False))
    return 0


if __name__ == "__main__":
    sys.exit(main())
