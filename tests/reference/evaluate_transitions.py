#!/usr/bin/env python3
"""Runs transitions of the schema of tests/data/fdtd3d/cases.json through the library, and prints what it finds as JSON.

    evaluate_transitions.py CASES.json [--curves DIR]

CASES.json holds {"cases": [...]}, a list of cases, or one case. f1_Hz, f1_depth_dB: the first minimum of |S21| in the case's
mode, null where there is none. f_series_Hz: without a trace the zeros of Im Zin, poles left out; else where the phase of S21
turns back. A case that fails has its message in `error` and null for the numbers; the others are not touched by it. --curves
writes DIR/ID.csv, 1 to 67 GHz in steps of 0.25 GHz, or as far up as the model answers: S11 and S21 of a barrel, or of one
barrel of a pair in its mode; without a trace S11; of a pair without mode the answers of all ports to 1A and to 1B, A being the
barrel at the origin. Needs the Python package.
"""

import argparse
import json
import math
import sys
import warnings
from pathlib import Path

sys.dont_write_bytecode = True
import libstub as ls  # noqa: E402
from transitions import F_LOSS, transition_of  # noqa: E402

GRID = [0.25e9 * i for i in range(4, 269)]
F_REF_RANGE = 1e9, 100e9        # the loss is met at the first notch, within this
NUMBERS = ("f1_Hz", "f1_depth_dB")


def mode_of(case):
    """Of the notches: the pair's; of a pair without, one port driven."""
    return "single" if case["pair"] is None or case["pair"].get("mode") is None else case["pair"]["mode"]


class Run:
    """A case as a network: its constant conductivity is met at the first notch, and for the curves at every frequency."""

    def __init__(self, case):
        self.case, self.mode, f_ref = case, mode_of(case), F_LOSS
        for _ in range(3):
            transition = transition_of(case, f_ref)
            top = min(GRID[-1], answered(transition))
            self.notches = []
            if case["trace"] is not None:
                self.notches = transition.notches(up_to=top, to=1, from_=0, mode=self.mode)
            if not self.notches or abs(self.notches[0].f / f_ref - 1) < 1e-3 or not F_REF_RANGE[0] < self.notches[0].f < F_REF_RANGE[1]:
                break
            f_ref = self.notches[0].f
        self.transition = transition
        self.f = [f for f in GRID if f <= top]
        self.s = [self.at(f) for f in self.f]
        if case["pair"] is not None and self.mode != "single":
            sign = -1.0 if self.mode == "odd" else 1.0
            self.s = [in_mode(matrix, sign) for matrix in self.s]

    def at(self, f):
        """S at a frequency, with the permittivity that the case has there."""
        return transition_of(self.case, min(max(f, 1e5), 1e11)).s([f]).tolist()[0]

    def names(self):
        """Row, column and name of what the curve's columns hold."""
        upper = [1] if self.case["trace"] is None else [1, 2]
        if self.case["pair"] is None or self.mode != "single":
            return [(i, 0, f"S{i + 1}1") for i in range(len(upper))]
        ports = [f"{end}{barrel}" for barrel in "AB" for end in upper]
        return [(i, j, f"S{to}_{ports[j]}") for j in (0, len(upper)) for i, to in enumerate(ports)]


def answered(transition):
    """As far up in the grid as the model answers at all, Hz."""
    for f in reversed(GRID):
        try:
            transition.s([f])
            return f
        except ls.ArgumentError as error:
            if error.field != "freq":
                raise
    raise ValueError("the model answers nowhere in the grid")


def in_mode(s, sign):
    """One barrel of a pair, both driven with equal (sign 1) or opposite (-1) signs; ports are the barrel's, then the partner's."""
    m = len(s) // 2
    return [[s[i][j] + sign * s[i][j + m] for j in range(m)] for i in range(m)]


def zeros(run):
    """Where S11 is real and negative: Im Zin is zero, and Zin nearer to a short than to an open end, which leaves out poles."""
    def imaginary(f):
        s = run.at(f)
        if run.case["pair"] is not None and run.mode != "single":
            s = in_mode(s, -1.0 if run.mode == "odd" else 1.0)
        return s[0][0].imag             # of the sign of Im Zin

    values = [matrix[0][0] for matrix in run.s]
    found = []
    for low, high, a, b in zip(run.f, run.f[1:], values, values[1:]):
        if (a.imag < 0.0) != (b.imag < 0.0) and a.real + b.real < 0.0:
            found.append(bisect(imaginary, low, high, a.imag < 0.0))
    return found


def bisect(function, low, high, low_is_negative):
    while high - low > 1e-9 * high:
        middle = 0.5 * (low + high)
        if (function(middle) < 0.0) == low_is_negative:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def evaluate(case):
    run = Run(case)
    first = run.notches[0] if run.notches else None
    turns = zeros(run) if case["trace"] is None else [n.f_series for n in run.notches if math.isfinite(n.f_series)]
    return run, {
        "id": case["id"], "f1_Hz": first and first.f, "f1_depth_dB": first and first.depth_db, "f_series_Hz": turns, "error": None,
    }


def write_curve(run, path):
    columns = run.names()
    with open(path, "w", encoding="ascii") as file:
        print("f_Hz", *(f"{name}{part}" for _, _, name in columns for part in ("re", "im")), sep=",", file=file)
        for f, s in zip(run.f, run.s):
            values = [part for i, j, _ in columns for part in (s[i][j].real, s[i][j].imag)]
            print(f"{f:.9g}", *(f"{value:.8g}" for value in values), sep=",", file=file)


def result_of(case, place, curves):
    name = case.get("id", f"case {place}") if isinstance(case, dict) else f"case {place}"
    try:
        if not isinstance(name, str) or not name or "/" in name or name.startswith("."):
            raise ValueError(f"id {name!r}: must be text that can name a file")
        run, result = evaluate(dict(case, id=name))
        if curves is not None:
            write_curve(run, curves / f"{name}.csv")
        return result
    except Exception as error:          # whatever is wrong with this one, the rest goes on
        text = str(error)
        if isinstance(error, KeyError):
            text = f"{text} is missing"
        return {"id": name, **dict.fromkeys(NUMBERS), "f_series_Hz": [], "error": f"{type(error).__name__}: {text}"}


def cases_in(text):
    found = json.loads(text)
    if isinstance(found, dict):
        found = found["cases"] if "cases" in found else [found]
    if not isinstance(found, list):
        raise TypeError("must hold cases, a list of them, or one")
    return found


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("cases", type=Path)
    parser.add_argument("--curves", type=Path)
    args = parser.parse_args()
    try:
        cases = cases_in(args.cases.read_text(encoding="utf-8"))
        if args.curves is not None:
            args.curves.mkdir(parents=True, exist_ok=True)
    except (OSError, ValueError, TypeError) as error:
        print(f"evaluate_transitions.py: {args.cases}: {error}", file=sys.stderr)
        return 1
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ls.RangeWarning)
        results = [result_of(case, i, args.curves) for i, case in enumerate(cases)]
    print(json.dumps({"results": results}, indent=1, allow_nan=False))
    return 0


if __name__ == "__main__":
    sys.exit(main())
