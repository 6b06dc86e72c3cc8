"""The model over frequency: values in, buffers out, warnings, notches."""

import array
import math
import warnings

import pytest
from conftest import make_via

import libstub as ls

np = pytest.importorskip("numpy")

GHZ = np.arange(1, 31) * 1e9


def test_identities(model):
    zin, s21, loss = model.zin(GHZ), model.s21(GHZ), model.added_loss(GHZ)
    assert zin.dtype == s21.dtype == np.complex128 and loss.dtype == np.float64
    assert s21 == pytest.approx(2 * zin / (2 * zin + 50.0), rel=1e-12)
    assert loss == pytest.approx(-20 * np.log10(abs(s21)), rel=1e-9)
    assert (zin.real >= 0).all() and (loss >= 0).all()


def test_shapes(model):
    square = GHZ[:24].reshape(2, 3, 4)
    assert model.zin(square).shape == (2, 3, 4)
    assert (model.zin(square).ravel() == model.zin(GHZ[:24])).all()
    assert isinstance(model.zin(5e9), complex) and isinstance(model.added_loss(5e9), float)
    assert model.zin(5e9) == model.zin([5e9])[0] == model.zin(np.float64(5e9)) == model.zin(np.array(5e9))
    for empty in ([], (), np.array([]), array.array("d")):
        assert model.zin(empty).shape == (0,) and model.added_loss(empty).shape == (0,)
    assert model.zin(np.empty((0, 3))).shape == (0, 3)


@pytest.mark.parametrize(
    "same",
    [
        lambda f: list(f),
        lambda f: tuple(f),
        lambda f: array.array("d", f),
        lambda f: memoryview(array.array("d", f)),
        lambda f: np.repeat(f, 2)[::2],  # strided
        lambda f: f[::-1].copy()[::-1],  # negative stride
        lambda f: f.astype(">f8"),
        lambda f: f.astype(np.int64),
        lambda f: f.astype(np.uint64),
        lambda f: f.astype(np.longdouble),
        lambda f: np.frombuffer(b"\0" + f.tobytes(), np.float64, offset=1),  # not aligned
        lambda f: np.asfortranarray(f.reshape(5, 6)).ravel(),
    ],
)
def test_what_goes_in(model, same):
    assert (model.zin(same(GHZ)) == model.zin(GHZ)).all()


def test_float32_goes_in(model):
    assert (model.zin(GHZ.astype(np.float32)) == model.zin(GHZ.astype(np.float32).astype(np.float64))).all()


@pytest.mark.parametrize(
    "wrong", ["1e9", b"1e9", None, True, ["1e9"], [1j], [None], np.array([True]), np.array(["x"]), np.array([1j]), {}, {1e9}, object()]
)
def test_what_does_not_go_in(model, wrong):
    with pytest.raises((TypeError, ValueError)) as caught:
        assert len(model.zin(wrong))
    assert "f: must be" in str(caught.value)


def test_ragged_lists(model):
    with pytest.raises(ValueError):
        model.zin([[1e9], [1e9, 2e9]])


def test_one_bad_frequency(model):
    out = np.full(3, 7.0 + 0j)
    for bad in (0.0, -1.0, 1e13, float("nan"), float("inf")):
        with pytest.raises(ls.ArgumentError) as caught:
            model.zin([1e9, bad, 2e9], out=out)
        assert caught.value.index == 1 and "freq = " in str(caught.value)
        assert np.isnan(out[1]) and not np.isnan(out[[0, 2]]).any()


def test_out(model):
    out = np.empty(GHZ.shape, complex)
    assert model.zin(GHZ, out=out) is out and (out == model.zin(GHZ)).all()
    pairs = np.empty(2 * GHZ.size)
    assert model.s21(GHZ, out=pairs) is pairs and (pairs.view(complex) == model.s21(GHZ)).all()
    plain = array.array("d", bytes(16 * GHZ.size))
    model.zin(GHZ, out=plain)
    assert (np.frombuffer(plain, complex) == out).all()
    loss = np.empty(GHZ.size)
    assert model.added_loss(GHZ, out=loss) is loss and (loss == model.added_loss(GHZ)).all()
    one = np.empty(1, complex)
    assert model.zin(5e9, out=one) is one and one[0] == model.zin(5e9)
    nothing = np.empty(0, complex)
    assert model.zin([], out=nothing) is nothing


@pytest.mark.parametrize(
    "out, error, message",
    [
        (np.empty(29, complex), ValueError, "out: holds 464 bytes: must hold 480 for 30 values"),
        (np.empty(31, complex), ValueError, "out: holds"),
        (np.empty(30), ValueError, "out: holds"),
        (np.empty(30, np.complex64), TypeError, "out: must be a buffer of complex128"),
        (np.empty(60, np.float32), TypeError, "out: must be a buffer of complex128"),
        (np.empty(60, ">f8"), TypeError, "out: must be a buffer of complex128"),
        (np.empty(60, complex)[::2], ValueError, "out: .*contiguous"),
        (bytearray(480), TypeError, "out: must be a buffer of complex128"),
        (bytes(480), BufferError, "out: "),
        ([0j] * 30, TypeError, "out: "),
        (7, TypeError, "out: "),
    ],
)
def test_bad_out(model, out, error, message):
    with pytest.raises(error, match=message):
        model.zin(GHZ, out=out)


def test_read_only_out(model):
    frozen = np.empty(30, complex)
    frozen.flags.writeable = False
    with pytest.raises((ValueError, BufferError), match="out: .*read-?only"):
        model.zin(GHZ, out=frozen)


def test_out_must_be_apart(model):
    memory = np.empty(3 * 30)
    memory[:30] = GHZ
    with pytest.raises(ValueError, match="out: shares memory"):
        model.zin(memory[:30], out=memory[:60])
    assert (memory[:30] == GHZ).all()
    model.zin(memory[:30], out=memory[30:])
    with pytest.raises(ValueError, match="out: shares memory"):
        model.added_loss(memory[:30], out=memory[:30])


def test_one_warning_a_call_with_counts(model):
    with pytest.warns(ls.RangeWarning) as caught:
        values = model.s21([1e9, 2e9, 120e9, 121e9, 122e9])
    assert len(caught) == 1 and not np.isnan(values).any()
    assert str(caught[0].message).startswith("Model.s21: 3 of 5 items are outside the stated range of the model")
    assert caught[0].filename == __file__
    with warnings.catch_warnings():
        warnings.simplefilter("error", ls.RangeWarning)
        with pytest.raises(ls.RangeWarning):
            model.s21([120e9])


def test_splitting_changes_nothing(model):
    whole = model.zin(GHZ)
    assert (np.concatenate([model.zin(GHZ[:7]), model.zin(GHZ[7:])]) == whole).all()


def test_stubs_by_number(stackup):
    model = make_via(stackup, connects=("L3", "L5")).model()
    assert [stub.side for stub in model.stubs] == ["top", "bottom"]
    both, top, bottom = model.zin(5e9), model.zin(5e9, stub=0), model.zin(5e9, stub=1)
    assert both == pytest.approx(1 / (1 / top + 1 / bottom), rel=1e-12)
    assert model.zin(5e9, stub=ls.ALL_STUBS) == both
    assert model.dk_effective in (model.line(0).dk_effective, model.line(1).dk_effective)
    with pytest.raises(ls.LibstubError, match="stub = 2"):
        model.zin(5e9, stub=2)
    for wrong in (1.0, "0", None, True):
        with pytest.raises(TypeError, match="stub: must be an integer"):
            model.zin(5e9, stub=wrong)


def test_line(model):
    line = model.line()
    assert line == model.line(0) and line.fidelity == "cavity"
    assert line.impedance == pytest.approx(math.sqrt(line.inductance / line.capacitance), rel=1e-12)
    assert model.dk_effective == line.dk_effective > 3.6
    with pytest.raises(ls.LibstubError, match="stub = 1"):
        model.line(1)


def test_notches(model):
    with pytest.warns(ls.RangeWarning, match="Model.notches"):
        many = model.notches(up_to=ls.ghz(400))
    few = model.notches(up_to=ls.ghz(20))
    assert few == many[:1] and len(many) > 3
    assert [n.f for n in many] == sorted(n.f for n in many)
    assert few[0].depth_db < -20 and few[0].stub == 0 and few[0].q > 10
    assert model.notches(up_to=ls.ghz(1)) == []
    assert repr(few[0]).startswith("Notch(")
    with pytest.raises(ls.ArgumentError):
        model.notches(up_to=-1)
    with pytest.raises(TypeError, match="up_to: must be a number"):
        model.notches(up_to="67 GHz")


def test_more_notches_than_the_first_guess(stackup):
    """A stub so long that it has more than 16 notches below 1 THz: all of them are given."""
    model = make_via(stackup, connects=("L1", "L3")).model(fidelity="bulk")
    f1 = model.notches(up_to=ls.ghz(60))[0].f
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ls.RangeWarning)
        many = model.notches(up_to=1e12)
    assert len(many) > 16 and 1e12 - many[-1].f < 2.1 * f1
    gaps = [b.f - a.f for a, b in zip(many, many[1:])]
    assert all(gap == pytest.approx(2 * f1, rel=0.05) for gap in gaps)


def test_no_stub(stackup):
    model = make_via(stackup, connects=("L1", "L10")).model()
    assert model.stubs == [] and model.notches(up_to=1e11) == []
    assert model.s21([1e9, 2e9]).tolist() == [1, 1]
    with pytest.raises(ls.LibstubError):
        model.dk_effective
    assert "no stub" in repr(model)


def test_fidelity_and_reference(via):
    bulk = ls.Model(via, fidelity="bulk", z_ref=42.5)
    assert bulk.line().fidelity == "bulk" and bulk.fidelity == "bulk" and bulk.z_ref == 42.5 and bulk.via is via
    zin = bulk.zin(5e9)
    assert bulk.s21(5e9) == pytest.approx(2 * zin / (2 * zin + 42.5), rel=1e-12)
    with pytest.raises(ls.ArgumentError, match="fidelity = 'best': must be 'default', 'bulk', 'loaded', 'ladder' or 'cavity'"):
        via.model(fidelity="best")
    for wrong in (None, 2, []):
        with pytest.raises(TypeError, match="fidelity: must be"):
            via.model(fidelity=wrong)
    for wrong in (0, -50.0, float("nan")):
        with pytest.raises(ls.ArgumentError, match="z_ref"):
            via.model(z_ref=wrong)
    with pytest.raises(TypeError, match="via: must be a Via"):
        ls.Model("via")


def test_fidelities_agree_as_far_as_they_say(via):
    """Each first notch is within the errors stated of that of the cavity model; all have the same stub."""
    best = via.model(fidelity="cavity")
    assert best.zin(GHZ).tobytes() == via.model().zin(GHZ).tobytes()
    first = best.notches(up_to=25e9)[0]
    assert 0 < first.error < 0.01 and best.line().stated_error == pytest.approx(first.error, rel=1e-9)
    seen = set()
    for fidelity in ("bulk", "loaded", "ladder"):
        model = via.model(fidelity=fidelity)
        notch, line = model.notches(up_to=33e9)[0], model.line()
        assert line.fidelity == fidelity and notch.error == line.stated_error
        assert abs(notch.f / first.f - 1) <= line.stated_error + first.error
        assert model.stubs == best.stubs
        seen.add(notch.f)
    assert len(seen) == 3


def test_annuli(via):
    default, four, eight = via.model(), via.model(annuli=4), via.model(annuli=8)
    assert default.annuli is None and four.annuli == 4 and "annuli=8" in repr(eight)
    assert four.zin(GHZ).tobytes() == default.zin(GHZ).tobytes() != eight.zin(GHZ).tobytes()
    assert ls.first_notch_batch([via], annuli=8).f1[0] == pytest.approx(eight.notches(60e9)[0].f, rel=1e-9)
    for wrong in (0, 1, 13, -4):
        with pytest.raises(ls.ArgumentError, match=f"annuli = {wrong}: must be >= 2 and <= 12"):
            via.model(annuli=wrong)
    for wrong in (4.0, "4", True):
        with pytest.raises(TypeError, match="annuli: must be an integer"):
            via.model(annuli=wrong)


def first_notch(via):
    return via.model().notches(up_to=100e9)[0].f


def test_return_vias_in_place(via):
    """A ring is its vias one by one; where they stand matters, how the ring is turned hardly does."""
    radius = ls.mil(40)
    places = [(radius * math.cos(a), radius * math.sin(a)) for a in (0, math.pi / 2, math.pi, 1.5 * math.pi)]
    ring, given = first_notch(via), first_notch(via.replace(returns=ls.Vias(places)))
    assert given == pytest.approx(ring, rel=1e-6)
    assert first_notch(via.replace(returns=ls.Vias(places[:1]))) < 0.99 * ring
    assert first_notch(via.replace(returns=ls.Vias(places, drill=ls.mil(20)))) > 1.001 * ring


def test_what_lies_outside(via):
    plain = first_notch(via)
    assert first_notch(via.replace(outside_dk=3.6)) < 0.99 * plain
    assert first_notch(via.replace(lid_distance=20e-6)) < 0.99 * plain
    assert first_notch(via.replace(lid_distance=5e-3)) == pytest.approx(plain, rel=1e-3)
    drilled = via.replace(backdrills=[ls.BackDrill("bottom", 0.8e-3, 0.45e-3)])
    assert first_notch(drilled.replace(hole_dk=3.6)) < 0.99 * first_notch(drilled)
    assert first_notch(drilled) > plain
    assert first_notch(via.replace(hole_dk=3.6)) == plain       # there is no hole


def test_sheets_of_copper(laminate):
    """Copper without thickness is a limit, not another case; nothing but copper may have none."""
    def first(thickness):
        layers = []
        for i in range(1, 7):
            layers.append(ls.Layer(f"L{i}", "plane" if 1 < i < 6 else "signal", thickness))
            if i < 6:
                layers.append(ls.Layer(f"D{i}", "dielectric", 0.2e-3, dielectric=laminate))
        return first_notch(make_via(ls.Stackup(layers), connects=("L1",)))

    assert first(1e-9) == pytest.approx(first(0.0), rel=1e-4)
    assert first(35e-6) != pytest.approx(first(0.0), rel=1e-3)
    with pytest.raises(ls.ArgumentError, match="thickness = 0"):
        ls.Stackup([ls.Layer("A", "signal", 0.0), ls.Layer("D", "dielectric", 0.0, dielectric=laminate), ls.Layer("B", "signal", 0.0)])


def test_opening_of_a_plane_that_connects(via):
    """The signal comes through it: its size counts."""
    here = via.replace(connects=("L2",))
    small, wide = (first_notch(here.replace(antipads={"L2": ls.mil(mil)})) for mil in (26, 44))
    assert small != pytest.approx(wide, rel=1e-4)


def test_permittivity():
    laminate = ls.Dielectric(4.2, 0.02, in_plane_ratio=1.2)
    eps = laminate.permittivity([[1e9, 1e10]])
    assert eps.through_plane.shape == (1, 2)
    assert eps.through_plane[0, 0] == pytest.approx(4.2 * (1 - 0.02j), rel=1e-12)
    assert eps.in_plane == pytest.approx(1.2 * eps.through_plane, rel=1e-12)
    assert isinstance(laminate.permittivity(1e9).in_plane, complex)
    with pytest.raises(ls.ArgumentError, match="freq") as caught:
        laminate.permittivity([1e9, 0.0])
    assert caught.value.index == 1
