"""The closed forms: arguments by name, ranges, messages. Their values are in test_check_values.py."""

import math

import pytest

import libstub as ls


def test_names_and_order_are_those_of_the_header():
    by_name = ls.return_inductance(drill=2.54e-4, count=4, distance=1e-3, return_drill=2.54e-4)
    assert by_name == ls.return_inductance(2.54e-4, 4, 1e-3, 2.54e-4)
    assert ls.loaded_stub_frequency(length=1e-3, dk=4.0, zs=40.0, end_capacitance=0.0) == pytest.approx(
        ls.quarter_wave_frequency(1e-3, 4.0), rel=1e-9
    )


def test_several_results_have_names():
    line = ls.coax(ls.mil(10), ls.mil(30), 4.0)
    assert line.impedance == pytest.approx(math.sqrt(line.inductance / line.capacitance), rel=1e-12)
    rods = ls.twin_rod(drill=ls.mil(28), pitch=ls.mil(59), dk=3.6)
    assert rods.odd_inductance > 0 and rods.differential_impedance > 0


def test_inverse_forms_agree():
    f = ls.quarter_wave_frequency(1e-3, 5.0, 3)
    assert ls.quarter_wave_length(f, 5.0, 3) == pytest.approx(1e-3, rel=1e-12)
    assert ls.quarter_wave_dk(f, 1e-3, 3) == pytest.approx(5.0, rel=1e-12)


@pytest.mark.parametrize(
    "call, field, message",
    [
        (lambda: ls.quarter_wave_frequency(0.0, 4.0), "length", "length = 0 m: must be > 0"),
        (lambda: ls.quarter_wave_frequency(1e-3, float("nan")), "dk", "dk = nan"),
        (lambda: ls.quarter_wave_frequency(1e-3, float("inf")), "dk", "dk = inf"),
        (lambda: ls.quarter_wave_frequency(1e-3, 4.0, 2), "n", "n = 2: must be odd"),
        (lambda: ls.rule_of_thumb_length(-1), "bit_rate", "bit_rate = -1"),
        (lambda: ls.quarter_wave_frequency(1e-3, 4.0, 2**40), "n", "n = 1099511627776"),
        (lambda: ls.quarter_wave_frequency(10**400, 4.0), "length", "length: too large"),
    ],
)
def test_out_of_range(call, field, message):
    with pytest.raises(ls.ArgumentError) as caught:
        call()
    assert message in str(caught.value)
    assert caught.value.field == field
    assert caught.value.status == ls.Status.E_ARGUMENT


def test_contradictions():
    with pytest.raises(ls.GeometryError, match="outer_diameter"):
        ls.coax(2e-3, 1e-3, 4.0)


@pytest.mark.parametrize("wrong", ["1", b"1", None, True, [1.0], (1.0,), {}, 1j, object()])
def test_wrong_types_are_named(wrong):
    with pytest.raises(TypeError, match=r"^dk: must be a number, not \w+$"):
        ls.coax(1e-3, 2e-3, wrong)


def test_wrong_types_of_integers():
    for wrong in (1.0, "1", None, True):
        with pytest.raises(TypeError, match="^n: must be an integer"):
            ls.quarter_wave_frequency(1e-3, 4.0, n=wrong)


def test_numpy_numbers_are_numbers():
    np = pytest.importorskip("numpy")
    expected = ls.quarter_wave_frequency(0.5, 4.0, 3)
    assert ls.quarter_wave_frequency(np.float32(0.5), np.int64(4), np.int32(3)) == expected
    assert ls.quarter_wave_frequency(np.array(0.5), 4.0, 3) == expected
    with pytest.raises(TypeError, match="length"):
        ls.quarter_wave_frequency(np.array([0.5]), 4.0)


def test_range_warning_shows_the_callers_line():
    with pytest.warns(ls.RangeWarning, match="quarter_wave_dk: outside the stated range of the model: dk = ") as caught:
        assert ls.quarter_wave_dk(1e12, 1.0) < 1.0
    assert len(caught) == 1
    assert caught[0].filename == __file__


def test_units():
    assert ls.mil(10) == 0.000254 and ls.mm(0.25) == 0.00025 and ls.um(35) == 35e-6 and ls.inch(1) == 0.0254
    assert ls.ghz(28) == 28e9 and ls.mhz(1.5) == 1.5e6 and ls.gbd(53.125) == 53.125e9 and ls.mbd(2) == 2e6
    assert ls.gbps(112) == 112e9 and ls.ps(3) == 3e-12 and ls.ns(3) == 3e-9
    assert ls.pf(2) == 2e-12 and ls.ff(2) == 2e-15 and ls.nh(2) == 2e-9 and ls.ph(2) == 2e-12
    for wrong in ("10", None, True, [10]):
        with pytest.raises(TypeError, match="value: must be a number"):
            ls.mil(wrong)


def test_units_of_arrays():
    np = pytest.importorskip("numpy")
    assert (ls.mil(np.array([10, 20])) == np.array([0.000254, 0.000508])).all()
