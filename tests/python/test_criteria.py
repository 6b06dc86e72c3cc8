"""Signals, margins, longest stubs and batches."""

import math
import warnings

import pytest
from conftest import make_via

import libstub as ls

np = pytest.importorskip("numpy")


def same(left, right):
    """Equal member by member, NaN being NaN."""
    return len(left) == len(right) and all(np.array_equal(a, b, equal_nan=True) for a, b in zip(left, right))


def test_signal():
    link = ls.Signal(baud=ls.gbd(53.125), levels=4)
    assert link.nyquist == 26.5625e9 and link.bit_rate == 106.25e9
    for wrong in (dict(baud=0), dict(baud=-1e9), dict(baud=1e13), dict(baud=1e9, levels=1), dict(baud=1e9, levels=0)):
        with pytest.raises(ls.ArgumentError):
            ls.Signal(**wrong)
    for wrong in (dict(baud="53 GBd"), dict(baud=None), dict(baud=1e9, levels=2.0), dict(baud=1e9, levels=True)):
        with pytest.raises(TypeError, match="must be a"):
            ls.Signal(**wrong)


def test_margin(model, slow, fast, criteria):
    good, bad = model.margin(slow, criteria), model.margin(fast, criteria)
    assert good.passes is True and bad.passes is False
    assert good.nyquist == slow.nyquist and good.notch_over_nyquist == pytest.approx(good.f1 / slow.nyquist)
    assert good.added_loss_db == pytest.approx(model.added_loss(slow.nyquist), rel=1e-9)
    assert bad.limited_by in (ls.Limit.NOTCH, ls.Limit.LOSS)
    only_notch = model.margin(slow, ls.Criteria(notch_over_nyquist=2))
    assert math.isnan(only_notch.loss_margin_db) and only_notch.limited_by == ls.Limit.NOTCH
    with pytest.raises(ls.ArgumentError, match="criteria"):
        model.margin(slow, ls.Criteria())
    with pytest.raises(TypeError, match="signal: must be a Signal, not float"):
        model.margin(10e9, criteria)
    with pytest.raises(TypeError, match="criteria: must be a Criteria, not dict"):
        model.margin(slow, {})


def test_criteria_of_zero_are_refused():
    for name in ("notch_over_nyquist", "added_loss_db"):
        with pytest.raises(ls.ArgumentError, match=f"{name} = 0: must be > 0"):
            ls.Criteria(**{name: 0})


def test_highest_symbol_rate(model, criteria):
    rate, limited_by = model.highest_symbol_rate(criteria)
    assert model.margin(ls.Signal(rate * 0.999), criteria).passes
    assert not model.margin(ls.Signal(rate * 1.001), criteria).passes
    assert limited_by in (ls.Limit.NOTCH, ls.Limit.LOSS)


def test_longest_stub(via, fast, criteria):
    limit = ls.longest_stub(via, fast, criteria)
    assert 0 < limit.length < limit.stub_length and limit.margin == pytest.approx(limit.length - limit.stub_length)
    assert limit == ls.longest_stub(via, fast, criteria, side="bottom")
    with pytest.raises(ls.NoSuchError):
        ls.longest_stub(via, fast, criteria, side="top")
    with pytest.raises(ls.ArgumentError, match="side = 'left'"):
        ls.longest_stub(via, fast, criteria, side="left")


def test_longest_stub_needs_a_side_where_there_are_two(stackup, fast, criteria):
    both = make_via(stackup, connects=("L3", "L5"))
    with pytest.raises(ls.ArgumentError, match="side: the via has stubs on both sides"):
        ls.longest_stub(both, fast, criteria)
    assert ls.longest_stub(both, fast, criteria, side="bottom").stub_length == pytest.approx(both.stubs[1].length, rel=1e-12)
    none = make_via(stackup, connects=("L1", "L10"))
    with pytest.raises(ls.NoSuchError):
        ls.longest_stub(none, fast, criteria)


# ---- batches ----------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def vias(stackup):
    return [make_via(stackup, antipad=ls.mil(26 + i), connects=("L1", f"L{3 + i % 2 * 2}")) for i in range(12)]


@pytest.mark.parametrize("fidelity", ["loaded", "ladder", "cavity"])
def test_first_notch_batch(vias, fidelity):
    result = ls.first_notch_batch(vias, fidelity=fidelity)
    assert all(column.shape == (12,) for column in result)
    assert result.f1.dtype == np.float64 and result.status.dtype == np.int32
    for i, via in enumerate(vias):
        model = via.model(fidelity=fidelity)
        # to the last bit in closed form; a minimum of |S21| that two searches bracket is not known so well
        assert result.dk_effective[i] == pytest.approx(model.dk_effective, rel=0 if fidelity == "loaded" else 1e-9, abs=0)
        assert result.length[i] == pytest.approx(via.stubs[0].length, rel=1e-12)
        assert result.f1[i] == pytest.approx(model.notches(up_to=ls.ghz(33))[0].f, rel=1e-3)


def test_margin_batch_is_the_same_as_one_by_one(vias, slow, fast, criteria):
    signals = [slow, fast] * 6
    result = ls.margin_batch(vias, signals, criteria)
    for i, via in enumerate(vias):
        margin = via.model().margin(signals[i], criteria)
        assert bool(result.passes[i]) == margin.passes and result.limited_by[i] == margin.limited_by
        for name in ("nyquist", "f1", "notch_over_nyquist", "notch_margin", "added_loss_db", "loss_margin_db", "stub_length"):
            assert getattr(result, name)[i] == getattr(margin, name)


def test_longest_stub_batch_is_the_same_as_one_by_one(vias, fast, criteria):
    wanted = [criteria, ls.Criteria(added_loss_db=0.3)] * 6
    for sides in (None, "bottom", ["bottom"] * 12):
        result = ls.longest_stub_batch(vias, fast, wanted, sides=sides, fidelity="loaded")
        for i, via in enumerate(vias):
            limit = ls.longest_stub(via, fast, wanted[i], fidelity="loaded")
            assert (result.length[i], result.stub_length[i], result.margin[i]) == (limit.length, limit.stub_length, limit.margin)
            assert result.limited_by[i] == limit.limited_by


def test_batches_over_stackups(vias, other_stackup, slow, fast, criteria):
    mixed = [via if i % 2 else via.replace(stackup=other_stackup) for i, via in enumerate(vias)]
    signals = [slow, fast, slow] * 4
    notches, margins = ls.first_notch_batch(mixed), ls.margin_batch(mixed, signals, [criteria] * 12)
    limits = ls.longest_stub_batch(mixed, fast, criteria)
    for i, via in enumerate(mixed):
        assert notches.f1[i] == ls.first_notch_batch([via]).f1[0]
        assert margins.f1[i] == via.model().margin(signals[i], criteria).f1
        assert margins.nyquist[i] == signals[i].nyquist
        assert limits.length[i] == ls.longest_stub(via, fast, criteria).length


def test_chunks_change_nothing(vias, fast, criteria):
    whole = ls.margin_batch(vias, fast, criteria)
    parts = [ls.margin_batch(vias[:5], fast, criteria), ls.margin_batch(vias[5:], fast, criteria)]
    assert same(whole, [np.concatenate(columns) for columns in zip(*parts)])


def test_empty_batches(fast, criteria):
    for result in (
        ls.first_notch_batch([]), ls.margin_batch([], fast, criteria), ls.margin_batch([], [], []),
        ls.longest_stub_batch([], fast, criteria),
    ):
        assert all(column.shape == (0,) for column in result)


def test_items_that_fail_raise_or_are_marked(vias, stackup, other_stackup, fast, criteria):
    none = make_via(stackup, connects=("L1", "L10"))
    items = [vias[0].replace(stackup=other_stackup), vias[1], none, vias[3], none]
    with pytest.raises(ls.NoSuchError, match="item 2") as caught:
        ls.longest_stub_batch(items, fast, criteria, sides="bottom")
    assert caught.value.index == 2
    marked = ls.longest_stub_batch(items, fast, criteria, sides="bottom", errors="mark")
    assert list(marked.status) == [0, 0, ls.Status.E_NONE, 0, ls.Status.E_NONE]
    assert np.isnan(marked.length[[2, 4]]).all() and not np.isnan(marked.length[[0, 1, 3]]).any()
    assert marked.length[1] == ls.longest_stub(vias[1], fast, criteria).length
    # a via without a stub has no notch, which is no failure
    first = ls.first_notch_batch(items)
    assert np.isnan(first.f1[2]) and first.status[2] >= 0


def test_range_warnings_of_a_batch_are_one(stackup, other_stackup, criteria):
    vias = [make_via(stackup), make_via(other_stackup), make_via(stackup)]
    quick = ls.Signal(200e9)
    with pytest.warns(ls.RangeWarning, match="margin_batch: 3 of 3 items") as caught:
        result = ls.margin_batch(vias, quick, criteria, fidelity="loaded")
    assert len(caught) == 1 and caught[0].filename == __file__
    assert list(result.status) == [ls.Status.W_RANGE] * 3


def test_batch_arguments(vias, via, fast, criteria):
    with pytest.raises(TypeError, match="vias: must be a sequence of Via, not Via"):
        ls.first_notch_batch(via)
    with pytest.raises(TypeError, match=r"vias\[1\]: must be a Via, not str"):
        ls.first_notch_batch([via, "x"])
    with pytest.raises(ls.ArgumentError, match=r"signals: 2 items: must be one, or as many as vias \(12\)"):
        ls.margin_batch(vias, [fast] * 2, criteria)
    with pytest.raises(TypeError, match="criteria: must be a Criteria or a sequence of them, not float"):
        ls.margin_batch(vias, fast, 2.0)
    with pytest.raises(ls.ArgumentError, match="sides: 1 items"):
        ls.longest_stub_batch(vias, fast, criteria, sides=["bottom"])
    with pytest.raises(ls.ArgumentError, match="errors = 'ignore'"):
        ls.first_notch_batch(vias, errors="ignore")
    with pytest.raises(ls.ArgumentError, match="criteria"):
        ls.margin_batch(vias, fast, ls.Criteria())
    with pytest.raises(TypeError):
        ls.first_notch_batch(vias, fidelity=1)


def test_generators_do(vias, fast, criteria):
    result = ls.margin_batch((via for via in vias), (fast for _ in vias), (criteria for _ in vias))
    assert same(result, ls.margin_batch(vias, fast, criteria))


def test_trade_facts(stackup):
    """Common practice, no source: a 25 mil stub is nothing at 14 GHz Nyquist and much at 29 GHz; longer, lower."""
    def stub(length):
        depth = make_via(stackup).stubs[0].length - length
        return make_via(stackup, backdrills=[ls.BackDrill("bottom", depth, ls.mil(18))]).model()

    criteria = ls.Criteria(notch_over_nyquist=2.0)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ls.RangeWarning)
        short = stub(ls.mil(25))
        assert short.margin(ls.Signal(28e9), criteria).f1 > 28e9
        assert short.margin(ls.Signal(28e9), criteria).added_loss_db < short.margin(ls.Signal(58e9), criteria).added_loss_db
        f1 = [stub(ls.mil(length)).margin(ls.Signal(28e9), criteria).f1 for length in (20, 25, 30, 40, 50)]
    assert f1 == sorted(f1, reverse=True)
