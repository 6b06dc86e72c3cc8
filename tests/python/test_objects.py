"""Frozen inputs, stackups and vias: types, checks, equality, repr, pickling."""

import copy
import math
import pickle

import pytest
from conftest import make_stackup, make_via

import libstub as ls

NAN = float("nan")


# ---- material and layers ----------------------------------------------------------------------------


def test_dielectric_is_checked_when_made():
    with pytest.raises(ls.ArgumentError, match=r"dk = 0\.5: must be >= 1 and <= 1000"):
        ls.Dielectric(0.5, 0.0)
    with pytest.raises(ls.ArgumentError, match="loss_tangent"):
        ls.Dielectric(4.0, 0.6)
    with pytest.raises(ls.ArgumentError, match="f_ref = 0: must be > 0"):
        ls.Dielectric(4.0, 0.0, f_ref=0)
    with pytest.raises(TypeError):
        ls.Dielectric(4.0)  # the loss tangent is never left out silently
    with pytest.raises(TypeError, match="dk: must be a number, not str"):
        ls.Dielectric("4.0", 0.0)


def test_nan_is_named():
    for call in (
        lambda: ls.Dielectric(NAN, 0.0),
        lambda: ls.Layer("L", "signal", NAN),
        lambda: ls.Ring(4, NAN),
        lambda: ls.Vias([(1e-3, NAN)]),
        lambda: ls.Signal(NAN),
        lambda: ls.Criteria(NAN),
        lambda: ls.Capability(depth_tolerance=NAN),
    ):
        with pytest.raises(ls.ArgumentError, match=r"\w+(\[0\])? = nan: must be a finite number"):
            call()


def test_layer_words_and_types():
    with pytest.raises(ls.ArgumentError, match="kind = 'copper': must be 'dielectric', 'signal', 'plane' or 'mixed'"):
        ls.Layer("L", "copper", 1e-5)
    with pytest.raises(TypeError, match="kind: must be 'dielectric'"):
        ls.Layer("L", 2, 1e-5)
    with pytest.raises(TypeError, match="name: must be text"):
        ls.Layer(3, "signal", 1e-5)
    with pytest.raises(TypeError, match="dielectric: must be a Dielectric, not float"):
        ls.Layer("D", "dielectric", 1e-4, dielectric=4.0)
    with pytest.raises(ls.ArgumentError, match="name: must not hold a null character"):
        ls.Layer("L\0x", "signal", 1e-5)


def test_frozen(laminate, stackup, via, model):
    for thing, name in ((laminate, "dk"), (stackup, "layers"), (via, "drill"), (model, "via"), (model, "new")):
        with pytest.raises(AttributeError):
            setattr(thing, name, 1)
        with pytest.raises(AttributeError):
            delattr(thing, name)


# ---- stackup ----------------------------------------------------------------------------------------


def test_stackup(stackup, laminate):
    assert len(stackup) == 19
    assert stackup.copper == tuple(f"L{i}" for i in range(1, 11))
    assert stackup.index("L3") == 4 and stackup.index(4) == 4
    assert stackup["L3"].name == stackup[4].name == "L3" and stackup[-1].name == "L10"
    assert [layer.name for layer in stackup][:3] == ["L1", "D1", "L2"]
    assert stackup["D1"].dielectric == laminate
    assert stackup.depth("L1") == (0.0, ls.um(18))
    assert stackup.depth("L10").bottom == pytest.approx(10 * ls.um(18) + 9 * ls.mil(8))
    between = stackup.interval(*(ls.um(18), ls.um(18) + ls.mil(8)))
    assert between.dk_through_plane == pytest.approx(3.6)
    assert between.dk_in_plane == pytest.approx(3.6 * 1.15)
    assert between.tol_plus == pytest.approx(ls.mil(0.5))


def test_stackup_errors(stackup, laminate):
    with pytest.raises(ls.NoSuchError, match="'L99'") as caught:
        stackup.index("L99")
    assert isinstance(caught.value, LookupError)
    with pytest.raises(ls.ArgumentError, match="99"):
        stackup.index(99)
    with pytest.raises(ls.ArgumentError, match="-1"):
        stackup.depth(-1)
    for wrong in (1.0, None, True):
        with pytest.raises(TypeError, match="layer: must be an integer"):
            stackup.index(wrong)
    with pytest.raises(ls.ArgumentError):
        ls.Stackup([])
    with pytest.raises(TypeError, match=r"layers\[1\]: must be a Layer, not str"):
        ls.Stackup([ls.Layer("L1", "signal", 1e-5), "D1"])
    bad = ls.Layer("D1", "dielectric", -1e-4, dielectric=laminate)
    with pytest.raises(ls.ArgumentError, match=r"layer 1 'D1': thickness = -0\.0001 m"):
        ls.Stackup([ls.Layer("L1", "signal", 1e-5), bad, ls.Layer("L2", "signal", 1e-5)])
    with pytest.raises(TypeError, match="top: must be a number"):
        stackup.interval("0", 1.0)


# ---- via --------------------------------------------------------------------------------------------


def test_via_layers_by_name_and_index(stackup):
    via = make_via(stackup, connects=(0, "L3"), span=(0, "L10"), antipads={2: 1e-3}, clear={"L3": 1e-3})
    assert via.connects == ("L1", "L3") and via.span == ("L1", "L10")
    assert via.antipads == {"L2": 1e-3} and via.clear == {"L3": 1e-3}


def test_stubs(stackup):
    (bottom,) = make_via(stackup).stubs
    assert (bottom.side, bottom.exit_layer, bottom.end_layer) == ("bottom", "L3", "L10")
    assert bottom.length == pytest.approx(stackup.depth("L10").bottom - stackup.depth("L3").bottom)
    assert bottom.length_min < bottom.length_rss_min < bottom.length < bottom.length_rss_max < bottom.length_max
    top, bottom = make_via(stackup, connects=("L3", "L5")).stubs
    assert top.side == "top" and bottom.side == "bottom"
    assert repr(top).startswith("Stub(top, ") and repr(top).endswith(" above L3)")
    assert make_via(stackup, connects=("L1", "L10")).stubs == []


def test_drilled_stub(stackup):
    drilled = make_via(stackup, backdrills=[ls.BackDrill("bottom", ls.mil(40), ls.mil(18))])
    (stub,) = drilled.stubs
    assert stub.end_layer is None
    assert stub.length == pytest.approx(make_via(stackup).stubs[0].length - ls.mil(40))


@pytest.mark.parametrize(
    "changes, error, message",
    [
        (dict(drill=0), ls.ArgumentError, "drill = 0"),
        (dict(drill=-1e-4), ls.ArgumentError, "drill"),
        (dict(drill=1.0), ls.ArgumentError, "drill"),
        (dict(drill="0.25 mm"), TypeError, "drill: must be a number, not str"),
        (dict(drill=True), TypeError, "drill: must be a number, not bool"),
        (dict(drill=None), TypeError, "drill: must be a number, not NoneType"),
        (dict(drill=NAN), ls.ArgumentError, "drill = nan"),
        (dict(antipad=ls.mil(9)), ls.GeometryError, "antipad"),
        (dict(pad=ls.mil(5)), ls.GeometryError, "pad"),
        (dict(connects=()), ls.ArgumentError, "connects"),
        (dict(connects=("L1", "L1")), ls.ArgumentError, "connects"),
        (dict(connects=("L1", "D1")), ls.LibstubError, "connects"),
        (dict(connects=("L1", "nowhere")), ls.NoSuchError, "connects: .*'nowhere'"),
        (dict(connects=("L1", 77)), ls.ArgumentError, "connects: .*77"),
        (dict(connects="L1"), TypeError, "connects: must be a sequence"),
        (dict(connects=("L1", 2.0)), TypeError, "connects: must hold names or indices"),
        (dict(connects=("L1", True)), TypeError, "connects: must hold names or indices"),
        (dict(connects=("L1", "L5"), span=("L1", "L3")), ls.GeometryError, "connects.*outside the span"),
        (dict(span=("L3", "L1"), connects=("L3",)), ls.GeometryError, "end_layer"),
        (dict(span=("L1", "L1"), connects=("L1",)), ls.GeometryError, "span: .*same layer 'L1'"),
        (dict(span=("L1",), connects=("L1",)), TypeError, "span: must be two layers"),
        (dict(returns=ls.Ring(0, 1e-3)), ls.ArgumentError, "returns: count = 0"),
        (dict(returns=1e-3), TypeError, "returns: must be a Ring"),
        (dict(returns=ls.Vias([(0.0, ls.mil(40)), (0.0, ls.mil(5))])), ls.GeometryError, "return_xy.1.*touches the barrel"),
        (dict(returns=ls.Vias([(0.0, ls.mil(40)), (0.0, ls.mil(41))])), ls.GeometryError, "return_xy.1.*touches return via 0"),
        (dict(outside_dk=0.5), ls.ArgumentError, "outside_dk = 0.5"),
        (dict(hole_dk=0), ls.ArgumentError, "hole_dk = 0: must be > 0"),
        (dict(lid_distance=0.0), ls.ArgumentError, "lid_distance = 0: must be > 0"),
        (dict(lid_distance=-1e-3), ls.ArgumentError, "lid_distance = -0.001"),
        (dict(pair=ls.Pair(1e-5)), ls.LibstubError, "pair_pitch"),
        (dict(pair=True), TypeError, "pair: must be a Pair"),
        (dict(pads=[1]), TypeError, "pads: must be a dict"),
        (dict(pads={"L1": "x"}), TypeError, r"pads\['L1'\]: must be a number"),
        (dict(antipads={"L2": ls.mil(9)}), ls.GeometryError, "'L2'"),
        (dict(nonfunctional_pads=1), TypeError, "nonfunctional_pads: must be True or False"),
        (dict(backdrills=[(1, 2, 3)]), TypeError, "backdrills: must be a sequence of BackDrill"),
        (dict(backdrills=[ls.BackDrill("bottom", ls.mil(40), ls.mil(2))]), ls.LibstubError, "diameter"),
        (dict(pin="top"), TypeError, "pin: must be a Pin"),
    ],
)
def test_via_errors(stackup, changes, error, message):
    with pytest.raises(error, match=message):
        make_via(stackup, **changes)


def test_via_arguments_are_keywords(stackup):
    with pytest.raises(TypeError):
        ls.Via(stackup, 1e-4)
    with pytest.raises(TypeError, match="unexpected keyword"):
        make_via(stackup, antipads_diameter=1)
    with pytest.raises(TypeError, match="stackup: must be a Stackup"):
        make_via("board.xml")


def test_sides_are_words():
    with pytest.raises(ls.ArgumentError, match="side = 'left': must be 'top' or 'bottom'"):
        ls.BackDrill("left", 1e-3, 1e-3)
    with pytest.raises(ls.ArgumentError, match="side = 'both'"):
        ls.Pin("both", 1e-3)
    with pytest.raises(ls.ArgumentError, match="sides = 'none': must be 'top', 'bottom' or 'both'"):
        ls.Capability(sides="none")


def test_replace(stackup, other_stackup, via):
    wider = via.replace(antipad=ls.mil(34))
    assert wider.antipad == ls.mil(34) and wider.drill == via.drill and wider != via
    assert via.replace() == via
    elsewhere = via.replace(stackup=other_stackup)
    assert elsewhere.stackup is other_stackup and elsewhere.stubs[0].length < via.stubs[0].length
    assert via.replace(pad=ls.mil(22)).pad_inner == ls.mil(22)
    assert via.replace(pad_end=0).pad_end == 0.0 and via.replace(pad_end=0).pad_start == via.pad_start


def test_pad_defaults(stackup):
    via = make_via(stackup, pad=ls.mil(20), pad_inner=ls.mil(18))
    assert (via.pad_start, via.pad_inner, via.pad_end) == (ls.mil(20), ls.mil(18), ls.mil(20))
    bare = make_via(stackup, pad=None)
    assert bare.pad_start == bare.pad_inner == bare.pad_end == 0.0


# ---- equality, repr, pickling -----------------------------------------------------------------------


def everything(stackup):
    laminate = ls.Dielectric(3.6, 0.004, in_plane_ratio=1.15, f_ref=10e9)
    via = make_via(
        stackup, span=("L1", "L10"), pair=ls.Pair(ls.mil(50), shared=True), pin=ls.Pin("top", ls.mil(5)),
        backdrills=[ls.BackDrill("bottom", ls.mil(12), ls.mil(18))], pads={"L3": ls.mil(22)},
        antipads={"L2": ls.mil(32)}, clear={"L5": ls.mil(40)}, nonfunctional_pads=True, returns=ls.Ring(3, ls.mil(60), ls.mil(8)),
    )
    link, criteria = ls.Signal(10.3125e9), ls.Criteria(notch_over_nyquist=2.0)
    return [
        laminate, ls.Conductor(5e7, 1e-6), ls.Layer("X", "dielectric", 1e-4, tol_plus=1e-5, dielectric=laminate), stackup,
        ls.Ring(4, 1e-3), ls.Vias([(1e-3, 0.0)], 2e-4), ls.Wall(1e-3), ls.Pair(1e-3), ls.BackDrill("top", 1e-3, 5e-4), ls.Pin("bottom", 1e-3), via, link,
        criteria, ls.Capability(depths=[1e-3, 2e-3], aspect_ratio=10), ls.Job(via, link, criteria), ls.Job(via),
    ]


def test_equal_hash_pickle_copy(stackup):
    twins = everything(make_stackup(ls.Dielectric(3.6, 0.004, in_plane_ratio=1.15)))
    for thing, twin in zip(everything(stackup), twins, strict=True):
        again = pickle.loads(pickle.dumps(thing))
        for same in (twin, again, copy.copy(thing), copy.deepcopy(thing)):
            assert same == thing and hash(same) == hash(thing) and repr(same) == repr(thing)
        assert thing != 1 and not thing == "x"
    assert len(set(everything(stackup) + twins)) == len(twins)


def test_a_pickled_via_works(stackup, model):
    for protocol in range(2, pickle.HIGHEST_PROTOCOL + 1):
        again = pickle.loads(pickle.dumps(model, protocol))
        assert repr(again) == repr(model)
        assert again.zin(5e9) == model.zin(5e9)


def test_pickled_errors():
    with pytest.raises(ls.ArgumentError) as caught:
        ls.Signal(-1)
    again = pickle.loads(pickle.dumps(caught.value))
    assert type(again) is ls.ArgumentError and str(again) == str(caught.value)
    assert (again.status, again.field, again.index) == (ls.Status.E_ARGUMENT, "symbol_rate", -1)


def test_error_classes():
    assert issubclass(ls.ArgumentError, ValueError) and issubclass(ls.GeometryError, ValueError)
    assert issubclass(ls.NoSuchError, LookupError) and issubclass(ls.ReadError, OSError)
    assert issubclass(ls.WriteError, OSError) and issubclass(ls.FormatError, ValueError)
    for cls in (ls.UnsupportedError, ls.BatchError):
        assert issubclass(cls, ls.LibstubError)


def test_every_failing_status_has_its_exception():
    from libstub import _core, _errors

    for status in ls.Status:
        error = _errors.error_for(status, "field", 3, "text")
        assert str(error) == "text"
        if status == ls.Status.E_MEMORY:
            assert type(error) is MemoryError
        else:
            assert isinstance(error, ls.LibstubError) and error.status == status
        assert _core.status_name(status) == "LSTUB_" + status.name
    special = {type(_errors.error_for(s, "", -1, "")) for s in ls.Status if s < 0}
    assert len(special) == 10  # E_NULL, E_SIZE and E_NEWER are errors of the binding itself and share the base class


def test_repr_tells(stackup, laminate):
    assert repr(laminate) == "Dielectric(dk=3.6, loss_tangent=0.004, in_plane_ratio=1.15)"
    assert repr(ls.Ring(4, ls.mil(40))) == "Ring(count=4, distance=40 mil)"
    assert repr(ls.Wall(1e-3)) == "Wall(distance=1 mm)"
    assert repr(ls.Vias([(1e-3, -ls.mil(40))])) == "Vias(positions=((1 mm, -40 mil),))"
    assert repr(ls.Layer("T", "signal", 35e-6)) == "Layer(name='T', kind='signal', thickness=35 um)"
    assert repr(ls.Signal(53.125e9, 4)) == "Signal(baud=53.125 GBd, levels=4)"
    assert repr(stackup) == "Stackup(10 copper layers of 19, 2.0088 mm)"
    assert repr(ls.Wall(math.pi * 1e-3)) == "Wall(distance=3.142 mm)"


def test_positions_of_return_vias():
    assert ls.Vias([[1e-3, 0], (0, 1e-3)]).positions == ((1e-3, 0.0), (0.0, 1e-3))
    for wrong, error, message in (
        ([], ls.ArgumentError, "positions: 0 return vias: must be 1 to 1000"),
        ([(1e-3, 0.0)] * 1001, ls.ArgumentError, "positions: 1001 return vias"),
        ([(1e-3,)], ls.ArgumentError, r"positions\[0\]: 1 numbers: must be a pair"),
        ([(1e-3, "x")], TypeError, r"positions\[0\]: must be a number"),
        ([1e-3], TypeError, r"positions\[0\]: must be a pair x, y, not float"),
        ("ab", TypeError, "positions: must be a sequence of pairs"),
        (None, TypeError, "positions: must be a sequence of pairs"),
    ):
        with pytest.raises(error, match=message):
            ls.Vias(wrong)
