"""Plans from jobs."""

import math
import pickle

import pytest
from conftest import make_via

import libstub as ls


@pytest.fixture(scope="module")
def jobs(stackup, slow, fast, criteria):
    return [
        ls.Job(make_via(stackup), slow, criteria),                             # passes
        ls.Job(make_via(stackup), fast, criteria),                             # fails
        ls.Job(make_via(stackup, connects=("L1", "L10")), fast, criteria),     # no stub
        ls.Job(make_via(stackup)),                                             # no signal
        ls.Job(make_via(stackup, connects=("L1", "L5")), fast, criteria),
    ]


@pytest.fixture(scope="module")
def plan(stackup, jobs, capability):
    return ls.plan(stackup, jobs, capability)


def test_decisions(plan, jobs):
    assert len(plan) == 5
    assert [d.action for d in plan][:4] == [ls.Action.KEEP, ls.Action.DRILL_BOTTOM, ls.Action.KEEP, ls.Action.NOT_JUDGED]
    assert [d.reason for d in plan][:4] == [ls.Reason.PASSES, ls.Reason.FAILS, ls.Reason.NO_STUB, ls.Reason.NO_SIGNAL]
    drilled = plan[1]
    assert not drilled.before.passes and drilled.after.passes
    cut = drilled.bottom
    assert cut.drilled and not drilled.top.drilled and drilled.top.must_not_cut is None
    assert cut.must_not_cut == "L3" and cut.depth_least <= cut.depth <= cut.depth_most
    assert cut.residual_least < cut.residual < cut.residual_most <= cut.limit
    assert drilled.stub_bottom == pytest.approx(jobs[1].via.stubs[0].length, rel=1e-12) and drilled.stub_top == 0.0
    assert cut.diameter == pytest.approx(ls.mil(18))
    assert drilled.before == jobs[1].via.model().margin(jobs[1].signal, jobs[1].criteria)


def test_the_planned_drill_does_what_the_plan_says(plan, jobs):
    cut = plan[1].bottom
    drilled = jobs[1].via.replace(backdrills=[ls.BackDrill("bottom", cut.depth, cut.diameter)])
    assert drilled.stubs[0].length == pytest.approx(cut.residual, abs=1e-12)
    assert drilled.model().margin(jobs[1].signal, jobs[1].criteria).passes


def test_sequence(plan):
    assert [repr(d) for d in plan] == [repr(plan[i]) for i in range(len(plan))]
    assert repr(plan[-1]) == repr(plan[4]) and [repr(d) for d in plan[1:3]] == [repr(plan[1]), repr(plan[2])]
    for index in (5, -6, 10**30):
        with pytest.raises(IndexError):
            plan[index]
        with pytest.raises(IndexError):
            plan.reason(index)
    with pytest.raises(TypeError):
        plan["0"]


def test_reasons_are_text(plan):
    assert all(plan.reason(i) for i in range(len(plan)))
    assert "Nyquist" in plan.reason(1)
    assert str(ls.Action.DRILL_BOTTOM) == "drill bottom" and str(ls.Action.KEEP) == "keep"
    assert all(str(reason) for reason in ls.Reason)


def test_groups_and_totals(plan):
    totals = plan.totals
    assert (totals.vias, totals.keep, totals.not_judged) == (5, 2, 1)
    assert totals.keep + totals.not_judged + totals.drill_bottom + totals.drill_top + totals.drill_both + totals.cannot == 5
    groups = plan.groups
    assert totals.groups == len(groups)
    assert sum(group.hits for group in groups) == totals.drill_bottom
    for group in groups:
        assert group.side == "bottom" and group.from_layer == "L10" and group.tolerance == pytest.approx(ls.mil(2))
    assert groups[plan[1].bottom.group].depth == plan[1].bottom.depth


def test_pickle(plan):
    again = pickle.loads(pickle.dumps(plan))
    assert repr(again) == repr(plan) and [d.bottom for d in again] == [d.bottom for d in plan]
    assert again.groups == plan.groups and again.stackup == plan.stackup


def test_empty_board(stackup, capability):
    plan = ls.plan(stackup, [], capability)
    assert len(plan) == 0 and list(plan) == [] and plan.groups == [] and plan.totals.vias == 0
    assert math.isinf(plan.totals.worst_notch_over_nyquist)


def test_no_side_allowed(stackup, jobs):
    plan = ls.plan(stackup, jobs, ls.Capability(sides="top"))
    assert plan[1].action == ls.Action.CANNOT and plan[1].reason_side in ("top", "bottom")


def test_errors(stackup, other_stackup, jobs, capability, via, fast):
    with pytest.raises(TypeError, match=r"jobs\[0\]: must be a Job"):
        ls.plan(stackup, [via], capability)
    with pytest.raises(TypeError, match="capability: must be a Capability"):
        ls.plan(stackup, jobs, None)
    with pytest.raises(TypeError, match="stackup: must be a Stackup"):
        ls.plan("board", jobs, capability)
    with pytest.raises(ls.GeometryError, match=r"jobs\[0\]: its via is on another stackup"):
        ls.plan(other_stackup, jobs, capability)
    with pytest.raises(ls.ArgumentError, match="depth_tolerance"):
        ls.plan(stackup, jobs, ls.Capability(depth_tolerance=-1e-6))
    with pytest.raises(TypeError, match="via: must be a Via"):
        ls.Job(fast)
    with pytest.raises(TypeError, match="signal: must be a Signal or None"):
        ls.Job(via, 1e9)
    with pytest.raises(TypeError, match="made by plan"):
        ls.Plan()


def test_a_job_in_error_does_not_stop_the_others(stackup, jobs, capability, fast):
    plan = ls.plan(stackup, [*jobs, ls.Job(make_via(stackup), fast, ls.Criteria())], capability)
    assert plan[5].action == ls.Action.REFUSED and plan[5].status < 0 and plan[5].reason == ls.Reason.ERROR
    assert plan.totals.refused == 1 and plan[0].action == ls.Action.KEEP


def test_depths_allowed(stackup, jobs, capability):
    with pytest.raises(TypeError, match="depths: must be a sequence"):
        ls.Capability(depths=1e-3)
    with pytest.raises(TypeError, match=r"depths\[1\]: must be a number"):
        ls.Capability(depths=[1e-3, "x"])
    only = ls.Capability(depths=[ls.mil(52)], bit_oversize=ls.mil(8))
    plan = ls.plan(stackup, jobs[1:2], only)
    assert plan[0].bottom.depth == ls.mil(52)
