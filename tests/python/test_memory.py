"""Nothing leaks: neither in what succeeds nor in what fails."""

import gc
import io
import pickle
import sys
import warnings

import pytest
from conftest import make_stackup, make_via

import libstub as ls
from libstub import _core

RULES = "signal a symbol_rate 10 GBd notch_over_nyquist 2\nnet A* a\n"


def resident():
    """Bytes in memory; None where the system does not tell."""
    try:
        with open("/proc/self/statm", encoding="ascii") as file:
            return int(file.read().split()[1]) * 4096
    except OSError:
        return None


def fails(call):
    with pytest.raises((ls.LibstubError, TypeError, ValueError, BufferError)):
        call()


def make_and_drop():
    laminate = ls.Dielectric(3.6, 0.004)
    stackup = make_stackup(laminate)
    via = make_via(stackup, pads={"L3": ls.mil(22)}, backdrills=[ls.BackDrill("bottom", ls.mil(12), ls.mil(18))])
    model = via.model(fidelity="loaded")
    cavity = via.replace(returns=ls.Vias([(1e-3, 0.0), (0.0, 1e-3)])).model()
    cavity.zin([1e9, 2e9]), cavity.notches(up_to=30e9), cavity.via.returns.positions
    f = [1e9, 2e9, 3e9] * 1000
    model.zin(f), model.added_loss(f), model.notches(up_to=30e9), model.line(), model.stubs, laminate.permittivity(f)
    link, criteria = ls.Signal(10e9), ls.Criteria(2.0)
    model.margin(link, criteria), model.highest_symbol_rate(criteria), ls.longest_stub(via, link, criteria, fidelity="loaded")
    ls.margin_batch([via] * 20, [link] * 20, criteria, fidelity="loaded")
    ls.longest_stub_batch([via] * 20, link, criteria, fidelity="loaded")
    plan = ls.plan(stackup, [ls.Job(via, link, criteria), ls.Job(via)], ls.Capability(depths=[1e-3]), fidelity="loaded")
    list(plan), plan.groups, plan.totals, plan.reason(0)
    rules = ls.Rules.parse(RULES)
    rules.match("A1"), rules.capability
    list(_core.complex_array(50)), _core.complex_array(50).real_imag().tolist()
    pickle.loads(pickle.dumps(plan))
    networks(laminate, via)
    with warnings.catch_warnings(record=True):
        warnings.simplefilter("always")
        model.zin([100e9] * 50)
    fails(lambda: ls.Dielectric(0.1, 0.0))
    fails(lambda: ls.Stackup([ls.Layer("A", "signal", 1e-5), ls.Layer("A", "signal", 1e-5)]))
    fails(lambda: via.replace(drill=1.0))
    fails(lambda: via.replace(pads={"L3": "x"}))
    fails(lambda: via.replace(returns=ls.Vias([(0.0, 0.0)])))
    values = via._values()
    fails(lambda: _core.record("via", (*values[:21], ((1.0,),), *values[22:])))
    fails(lambda: _core.record("via", (*values[:25], ((1,),), *values[26:])))
    fails(lambda: _core.record("via", (*values[:25], ((1, 2), (1, 2)), *values[26:])))
    fails(lambda: _core.record("via", (*values[:-1], (0.0, 1.0))))
    fails(lambda: model.zin([1e9, "x"]))
    fails(lambda: model.zin([1e9] * 999 + [0.0]))
    fails(lambda: model.zin(f, out=bytearray(7)))
    fails(lambda: model.zin(f, out=bytes(16 * len(f))))
    fails(lambda: ls.margin_batch([via], link, ls.Criteria()))
    fails(lambda: ls.margin_batch([via] * 3, [link] * 2, criteria))
    fails(lambda: ls.plan(stackup, [], ls.Capability(depth_tolerance=-1)))
    fails(lambda: ls.Rules.parse("nonsense"))
    fails(lambda: ls.Rules.load("/nonexistent/rules"))
    fails(lambda: ls.Board.load("/nonexistent/board"))
    fails(lambda: _core.stackup_create((None,)))
    fails(lambda: _core.stackup_create((1,)))
    fails(lambda: _core.model_zin(1, 0, f, f))
    fails(lambda: _core.record("via", (1, 2)))
    fails(lambda: _core.record("job", (link._record, None, None)))


def networks(laminate, coupon):
    board = ls.Stackup([
        ls.Layer("A", "plane", 0.0), ls.Layer("D", "dielectric", 2e-4, dielectric=laminate), ls.Layer("B", "plane", 0.0),
        ls.Layer("E", "dielectric", 1e-4, dielectric=laminate), ls.Layer("C", "signal", 0.0)])
    via = ls.Via(board, drill=2.5e-4, antipad=7e-4, antipads={"A": 7e-4}, connects=("A",),
                 returns=ls.Vias([(1e-3, 0.0), (0.0, 1e-3)], spans=[("A", "B"), None]))
    through = via.transition([ls.CoaxPort("A")])
    f = [1e9 * i for i in range(1, 21)]
    s = through.s(f)
    through.notches(up_to=60e9, to=0), through.remarks, through.reference
    strip = ls.Stripline(width=1e-4, height_below=1e-4, height_above=1e-4, dielectric_below=laminate, conductor=ls.Conductor(roughness=1e-6))
    strip.line(f), strip.conductor.surface_impedance(f)
    two = ls.shunt([25.0] * 20)
    ls.renormalise(two, 50, 75), ls.cascade(two, two), ls.deembed(two, two), ls.convert(s, "S", "Z"), ls.port_map(two, [1])
    mixed = ls.to_mixed(two, [(0, 1)])
    ls.to_single(mixed.s, [(0, 1)]), ls.passivity(two), ls.reciprocity(two), ls.causality(f, two), ls.tdr(f, two, f[:0], rise_time=1.1e-10)
    ls.step_response(f, two, [0.0, 5e-10], rise_time=1.1e-10), ls.insertion_loss_deviation(f, [x / 1e9 for x in f])
    file, out = ls.Touchstone(f, two, comments=["x"]), io.BytesIO()
    file.write(out)
    ls.Touchstone.parse(out.getvalue()).rows, ls.Touchstone.read(io.BytesIO(out.getvalue())), pickle.loads(pickle.dumps(file))
    ls.find_notches(f, [1 + 0j] * 20), ls.fit_effective_dk(1e10, 1e-3)
    ls.fit_in_plane_dk(lambda ratio, offset, i: 1e10 / ratio, [9e9], 1e7)
    ls.fit_coupons([coupon], [coupon.model(fidelity="loaded").notches(40e9)[0].f / 1.02], 1e8, fidelity="loaded").stackup
    fails(lambda: via.transition([ls.TracePort("B")]))
    fails(lambda: via.transition([ls.CoaxPort("A"), 1]))
    fails(lambda: through.s([0.0]))
    fails(lambda: through.notches(up_to=1e10))
    fails(lambda: ls.cascade(two, s))
    fails(lambda: ls.renormalise(two, 50, [1, 2, 3]))
    fails(lambda: ls.convert([[[0, 1], [1, 0]]], "S", "Z"))
    fails(lambda: ls.to_mixed(two, [(0, 7)]))
    fails(lambda: ls.Touchstone(f, two, comments=["a\0"]).write(out))
    fails(lambda: ls.Touchstone(f, two, rows=[("single", 0, None)]).write(out))
    fails(lambda: ls.Touchstone(f[:3], two).write(out))
    fails(lambda: ls.Touchstone.parse(b"# x"))
    fails(lambda: ls.Touchstone.read(io.StringIO("x")))
    fails(lambda: ls.Touchstone(f, two).write(io.StringIO()))
    fails(lambda: ls.find_notches(f, s))
    fails(lambda: ls.fit_in_plane_dk(lambda *_: "x", [9e9], 1e7))
    fails(lambda: ls.fit_coupons([via], [1e10, 1e10], 1e7))
    fails(lambda: _core.touchstone_write((1, 2), out.write))
    fails(lambda: _core.transition_s(file, f, f))


def test_memory_does_not_grow():
    if resident() is None:
        pytest.skip("the system does not tell how much memory is in use")
    for _ in range(60):
        make_and_drop()
    gc.collect()
    before = resident()
    for _ in range(300):
        make_and_drop()
    gc.collect()
    # a leak of one struct a round would be 300 times some hundred bytes, one of a handle some kilobytes: 1 MB and more
    assert resident() - before < 700_000


def test_references_do_not_grow():
    types = (_core.Handle, _core.Record, _core.ComplexArray)
    shared = (None, True, False, (), "L3")
    for _ in range(5):
        make_and_drop()
    gc.collect()
    before = [sys.getrefcount(thing) for thing in types + shared]
    for _ in range(50):
        make_and_drop()
    gc.collect()
    after = [sys.getrefcount(thing) for thing in types + shared]
    assert all(abs(a - b) < 50 for a, b in zip(after, before)), (before, after)


def test_arguments_are_let_go():
    stackup = make_stackup(ls.Dielectric(3.6, 0.004))
    via = make_via(stackup)
    f = [1e9, 2e9]
    import array

    buffer, out = array.array("d", f), array.array("d", bytes(32))
    model = via.model()
    counts = [sys.getrefcount(thing) for thing in (via, stackup, buffer, out, model)]
    for _ in range(100):
        model.zin(buffer, out=out)
        ls.first_notch_batch([via] * 3)
    assert [sys.getrefcount(thing) for thing in (via, stackup, buffer, out, model)] == counts
    buffer.append(3e9)  # still exported buffers would refuse this
    out.append(0.0)
