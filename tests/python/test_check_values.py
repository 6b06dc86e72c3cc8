"""Values from outside, in the table that C, Python and Lua share."""

import csv
import math

import pytest
from conftest import ROOT

import libstub as ls

TABLE = ROOT / "tests" / "data" / "check_values.csv"


def dielectric_permittivity(output, freq, **members):
    eps = ls.Dielectric(**members).permittivity(freq).through_plane
    return {"through_plane_re": eps.real, "loss_tangent": -eps.imag / eps.real}[output]


def signal_value(name):
    def call(symbol_rate, levels=2):
        return getattr(ls.Signal(baud=symbol_rate, levels=int(levels)), name)

    return call


# What the header has as a function of a struct is a member of an object here.
OF_OBJECTS = {"signal_nyquist": signal_value("nyquist"), "signal_bit_rate": signal_value("bit_rate")}


def number(text):
    return int(text) if text.lstrip("-").isdigit() else float(text)


def evaluate(function, arguments):
    name, _, output = function.partition(":")
    values = {key: number(value) for key, value in (pair.split("=") for pair in arguments.split())}
    if name == "dielectric_permittivity":
        return dielectric_permittivity(output, **values)
    call = OF_OBJECTS.get(name) or getattr(ls, name, None)
    assert callable(call), f"the binding has no function {name!r}"
    result = call(**values)
    return getattr(result, output) if output else result


def rows():
    with TABLE.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def test_the_table_has_enough_rows():
    assert len(rows()) >= 20


@pytest.mark.parametrize("row", rows(), ids=lambda row: row["id"])
def test_value(row):
    assert row["source"].strip()
    expected, rel, abs_ = (float(row[key]) for key in ("expected", "rel_tol", "abs_tol"))
    result = evaluate(row["function"], row["arguments"])
    assert math.isclose(result, expected, rel_tol=rel, abs_tol=abs_), f"{result!r} for {expected!r}: {row['source']}"


def test_an_unknown_function_is_noticed():
    with pytest.raises(AssertionError, match="no function"):
        evaluate("no_such_formula", "length=1")
