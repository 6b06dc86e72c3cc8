"""From the lab to the model: notches found, lengths, Dk and in-plane Dk fitted, back into a stackup."""

import csv
import math
import pickle

import pytest
from conftest import ROOT, make_stackup, make_via

import libstub as ls

np = pytest.importorskip("numpy")

CHANNELS = ROOT / "tests" / "data" / "channels"


def channel(name):
    """Sdd21 of a measured backplane."""
    if not CHANNELS.is_dir():
        pytest.skip("needs the checkout")
    with open(CHANNELS / f"backplane_{name}_sdd21.csv", encoding="ascii", newline="") as file:
        rows = list(csv.reader(file))[1:]
    values = np.array(rows, float)
    return values[:, 0], values[:, 1] + 1j * values[:, 2]


def made_channel(model, noise=1e-3, seed=1):
    """A stub in a lossy line that reflects a little at both ends."""
    f, rng = np.linspace(50e6, 40e9, 2000), np.random.default_rng(seed)
    loss = np.exp(-(1 + 1j) * 0.5 * np.sqrt(f / 10e9) - 0.3 * f / 10e9)
    s = model.s21(f) * loss / (1 - 0.02 * np.exp(-2j * np.pi * f * 1.3e-9))
    return f, s + noise * (rng.normal(size=f.size) + 1j * rng.normal(size=f.size))


# ---- notches --------------------------------------------------------------------------------------------


def test_a_measured_backplane():
    f, s = channel("long_stub")
    found = ls.find_notches(f, s, window=0.5e9)
    (notch,) = found.notches
    assert notch.f_minimum == pytest.approx(7.16e9, abs=0.0101e9) and notch.quality == ls.Quality.GOOD
    assert abs(notch.f - 7.16e9) < 2 * notch.f_sigma < 0.4e9 and notch.window == pytest.approx(0.5e9, rel=0.05)
    assert found.averaged_db.shape == found.trend_db.shape == f.shape
    assert np.nanmin(found.averaged_db[f < 9e9]) == pytest.approx(notch.level_db)
    assert "GHz" in repr(notch) and "GOOD" in repr(notch)
    assert ls.find_notches(f, s).notches[0].f == pytest.approx(notch.f, abs=notch.f_sigma)
    assert ls.find_notches(f, s, f_high=6.5e9).notches == ()


def test_none_is_an_answer():
    f, s = channel("control")
    assert ls.find_notches(f, s).notches == ls.find_notches(f, s, window=0.5e9).notches == ()


def test_a_stub_put_into_a_channel(model):
    f, s = made_channel(model)
    wanted = model.notches(up_to=40e9)
    found = ls.find_notches(f, s)
    assert len(found.notches) == len([n for n in wanted if n.f < 35e9])
    first = found.notches[0]
    assert abs(first.f - wanted[0].f) < 4 * first.f_sigma < 0.05 * first.f
    assert all(isinstance(n.quality, ls.Quality) for n in found.notches)
    again = pickle.loads(pickle.dumps(first))
    assert again == first and type(again) is ls.MeasuredNotch
    part = ls.find_notches(f, s, f_low=2e9, f_high=30e9, depth_least=6)
    assert np.isnan(part.averaged_db[f < 1.9e9]).all() and np.isfinite(part.averaged_db[(f > 3e9) & (f < 29e9)]).all()


def test_what_goes_in(model):
    f, s = made_channel(model)
    network = np.zeros((f.size, 2, 2), complex)
    network[:, 1, 0] = s
    assert repr(ls.find_notches(f, network[:, 1, 0]).notches) == repr(ls.find_notches(list(f), s.tolist()).notches)
    for call, error, message in (
        (lambda: ls.find_notches(f, network), ls.ArgumentError, r"s: an array of shape \(2000, 2, 2\): must be \(n,\)"),
        (lambda: ls.find_notches(f[:9], s), ls.ArgumentError, "s: an array of shape"),
        (lambda: ls.find_notches(f[:9], s[:9]), ls.ArgumentError, "9"),
        (lambda: ls.find_notches(f[::-1], s), ls.ArgumentError, "freq"),
        (lambda: ls.find_notches(f, s * np.nan), ls.ArgumentError, "s"),
        (lambda: ls.find_notches(f, s, window=0), ls.ArgumentError, "window = 0: must be > 0"),
        (lambda: ls.find_notches(f, s, depth_least=200), ls.ArgumentError, "depth_least = 200"),
        (lambda: ls.find_notches(f, s, f_low="1"), TypeError, "f_low: must be a number"),
        (lambda: ls.find_notches(1e9, 1j), ls.ArgumentError, "s: an array"),
    ):
        with pytest.raises(error, match=message):
            call()


# ---- one stub -------------------------------------------------------------------------------------------


def test_dk_and_length_of_a_stub():
    f = ls.quarter_wave_frequency(2e-3, 4.4)
    dk = ls.fit_effective_dk(f, 2e-3, f_sigma=0.01 * f, length_sigma=2e-5)
    assert dk.value == pytest.approx(4.4, rel=1e-12) and dk.sigma == pytest.approx(4.4 * 2 * math.hypot(0.01, 0.01), rel=1e-9)
    length = ls.fit_length(f, 4.4, f_sigma=0.01 * f, dk_sigma=0.088)
    assert length.value == pytest.approx(2e-3, rel=1e-12) and length.sigma == pytest.approx(2e-3 * math.hypot(0.01, 0.01), rel=1e-9)
    assert ls.fit_effective_dk(3 * f, 2e-3, n=3).value == pytest.approx(4.4) and ls.fit_effective_dk(f, 2e-3).sigma == 0
    for call in (lambda: ls.fit_effective_dk(-1, 2e-3), lambda: ls.fit_effective_dk(f, 2e-3, f_sigma=-1), lambda: ls.fit_length(f, 4.4, n=2)):
        with pytest.raises(ls.ArgumentError):
            call()


# ---- coupons --------------------------------------------------------------------------------------------


LENGTHS = (1.0e-3, 1.5e-3, 2.0e-3, 2.5e-3)


def quarter(ratio, offset, i):
    return 299792458 / (4 * (LENGTHS[i] + offset) * math.sqrt(3.6 * ratio))


def test_in_plane_dk_with_a_model_of_the_caller():
    f = [quarter(1.17, 0.0, i) for i in range(4)]
    fit = ls.fit_in_plane_dk(quarter, f, 1e7)
    assert fit.ratio == pytest.approx(1.17, rel=1e-6) and fit.describes and fit.dof == 3 and fit.offset == 0 and fit.stackup is None
    assert fit.ratio_low < 1.17 < fit.ratio_high and fit.chi2 < 1e-6 and len(fit.residuals) == 4
    both = ls.fit_in_plane_dk(quarter, [quarter(1.17, 5e-5, i) for i in range(4)], [1e7] * 4, with_offset=True)
    assert both.ratio == pytest.approx(1.17, rel=1e-5) and both.offset == pytest.approx(5e-5, rel=1e-3) and both.dof == 2
    assert "offset=50 um" in repr(both) and "offset" not in repr(fit)
    wrong = ls.fit_in_plane_dk(quarter, [x * (1 + 0.05 * (-1) ** i) for i, x in enumerate(f)], 1e7)
    assert not wrong.describes and "does not describe them" in repr(wrong)
    assert pickle.loads(pickle.dumps(both)) == both


def test_a_model_that_raises():
    def fails(ratio, offset, i):
        raise KeyError("mine")

    with pytest.raises(KeyError, match="mine"):
        ls.fit_in_plane_dk(fails, [1e10], 1e7)
    with pytest.raises(TypeError, match="predict: must be a number, not str"):
        ls.fit_in_plane_dk(lambda *_: "x", [1e10], 1e7)
    with pytest.raises(ls.LibstubError):
        ls.fit_in_plane_dk(lambda *_: float("nan"), [1e10], 1e7)
    with pytest.raises(TypeError, match="predict: must be callable, not int"):
        ls.fit_in_plane_dk(7, [1e10], 1e7)
    with pytest.raises(ls.NoSuchError):
        ls.fit_in_plane_dk(lambda ratio, offset, i: 1e10 / ratio, [9e10], 1e7)
    for f, sigma in ((1e10, 1e7), ([1e10], [1e7, 1e7]), ([1e10], 0.0), ([], 1e7), ([-1e10], 1e7)):
        with pytest.raises(ls.ArgumentError):
            ls.fit_in_plane_dk(quarter, f, sigma)


def test_coupons(stackup):
    """A laminate of a ratio that nobody knows: what is measured on coupons gives it back, and the stackup that has it."""
    hidden = stackup.with_in_plane_ratio(1.21)
    coupons = [make_via(stackup, connects=("L1", name)) for name in ("L3", "L5", "L7")]
    f = [coupon.replace(stackup=hidden).model(fidelity="ladder").notches(60e9)[0].f for coupon in coupons]
    fit = ls.fit_coupons(coupons, f, 1e7, fidelity="ladder")
    assert fit.ratio == pytest.approx(1.21, rel=1e-4) and fit.describes and fit.dof == 2
    assert fit.ratio_low < 1.21 < fit.ratio_high and max(map(abs, fit.residuals)) < 1e6
    assert fit.stackup["D1"].dielectric.in_plane_ratio == fit.ratio and fit.stackup["D1"].dielectric.dk == 3.6
    again = coupons[0].replace(stackup=fit.stackup).model(fidelity="ladder").notches(60e9)[0].f
    assert again == pytest.approx(f[0], rel=1e-4)
    both = ls.fit_coupons(coupons, f, [1e7] * 3, with_offset=True, fidelity="ladder")
    assert both.dof == 1 and abs(both.offset) < 4 * both.offset_sigma + 1e-6
    assert pickle.loads(pickle.dumps(fit)) == fit


def test_coupons_that_are_wrong(stackup, other_stackup):
    via = make_via(stackup)
    for call, error, message in (
        (lambda: ls.fit_coupons([], [], 1e7), ls.ArgumentError, "vias: must hold at least one"),
        (lambda: ls.fit_coupons(via, [1e10], 1e7), TypeError, "vias: must be a sequence"),
        (lambda: ls.fit_coupons([via, 1], [1e10] * 2, 1e7), TypeError, r"vias\[1\]: must be a Via"),
        (lambda: ls.fit_coupons([via, make_via(other_stackup)], [1e10] * 2, 1e7), ls.GeometryError, r"vias\[1\]: is on another"),
        (lambda: ls.fit_coupons([via], [1e10] * 2, 1e7), ls.ArgumentError, "f: 2 values: must be as many as vias"),
        (lambda: ls.fit_coupons([via], [1e10], -1), ls.ArgumentError, "f_sigma"),
        (lambda: ls.fit_coupons([make_via(stackup, connects=("L1", "L10"))], [1e10], 1e7, fidelity="loaded"), ls.LibstubError, ""),
    ):
        with pytest.raises(error, match=message or None):
            call()


def test_with_in_plane_ratio(stackup):
    other = stackup.with_in_plane_ratio(1.3)
    assert {layer.dielectric.in_plane_ratio for layer in other} == {1.3} and stackup["D1"].dielectric.in_plane_ratio == 1.15
    assert [layer.thickness for layer in other] == [layer.thickness for layer in stackup] and other != stackup
    assert stackup.with_in_plane_ratio(1.15) == stackup == make_stackup(ls.Dielectric(3.6, 0.004, in_plane_ratio=1.15))
    for wrong in (0.4, 2.1, float("nan")):
        with pytest.raises(ls.ArgumentError, match="ratio"):
            stackup.with_in_plane_ratio(wrong)
    with pytest.raises(TypeError, match="ratio: must be a number"):
        stackup.with_in_plane_ratio("1.2")
