"""Transitions: shapes, references, identities, pairs, what is refused; spans of return vias, partners of their own, edges."""

import array
import pickle
import threading
import time
import warnings

import pytest

import libstub as ls

np = pytest.importorskip("numpy")

F = np.linspace(1e9, 60e9, 60)
PAIR = [(0, 2), (1, 3)]


@pytest.fixture(scope="module")
def board():
    """Nine cavities of 0.2 mm between planes, a layer for traces in the middle of two of them, signals below."""
    core, layers = ls.Dielectric(3.5, 0.005, f_ref=20e9), []
    for i in range(10):
        layers.append(ls.Layer(f"P{i}", "plane", 0.0))
        if i in (3, 6):
            layers += [ls.Layer(f"U{i}", "dielectric", 0.1e-3, dielectric=core), ls.Layer(f"T{i}", "signal", 0.0),
                       ls.Layer(f"V{i}", "dielectric", 0.1e-3, dielectric=core)]
        else:
            layers.append(ls.Layer(f"D{i}", "dielectric", 0.2e-3 if i < 9 else 0.1e-3, dielectric=core))
    return ls.Stackup([*layers, ls.Layer("BOTTOM", "signal", 0.0)])


def make_via(board, **changes):
    arguments = dict(drill=0.25e-3, connects=("P0", "T3"), antipad=0.7e-3, antipads={"P0": 0.7e-3}, pads={"T3": 0.45e-3, "BOTTOM": 0.45e-3},
                     returns=ls.Vias([(0.65e-3, 0.65e-3), (-0.65e-3, 0.65e-3), (0.65e-3, -0.65e-3), (-0.65e-3, -0.65e-3)]))
    return ls.Via(board, **{**arguments, **changes})


def line(layer="T3", **changes):
    return ls.TracePort(layer, **{**dict(impedance=48.8, dk=3.5, loss_tangent=0.005, width=0.113e-3, distance=2e-3, z_ref=48.8), **changes})


PORTS = (ls.CoaxPort("P0", dk=1.524), line())


@pytest.fixture(scope="module")
def via(board):
    return make_via(board)


@pytest.fixture(scope="module")
def through(via):
    return via.transition(PORTS)


@pytest.fixture(scope="module")
def pair(board):
    return pair_via(board).transition(PORTS)


def pair_via(board, **changes):
    returns = ls.Vias([(-0.9e-3, 0.0), (1.8e-3, 0.0)])
    return make_via(board, **{**dict(returns=returns, pair=ls.Pair(0.9e-3)), **changes})



# ---- one barrel -----------------------------------------------------------------------------------------


def test_s(through):
    s = through.s(F)
    assert s.shape == (60, 2, 2) and s.dtype == np.complex128
    assert ls.passivity(s).max() <= 1 and ls.reciprocity(s).max() < 1e-11
    assert (through.s(F.reshape(3, 4, 5)).reshape(s.shape) == s).all()
    assert through.s(5e9).shape == (2, 2) and (through.s(F[7]) == s[7]).all() and through.s([]).shape == (0, 2, 2)
    assert through.reference == (50.0, 48.8) and through.ports == PORTS and through.remarks == ()
    out = np.empty(s.shape, complex)
    assert through.s(F, out=out) is out and (out == s).all()
    plain = array.array("d", bytes(16 * s.size))
    through.s(list(F), out=plain)
    assert (np.frombuffer(plain, complex).reshape(s.shape) == s).all()
    with pytest.raises(ValueError, match="out: holds"):
        through.s(F, out=np.empty(60, complex))
    with pytest.raises(ls.ArgumentError, match="freq") as caught:
        through.s([1e9, 0.0])
    assert caught.value.index == 1


def test_other_references_are_renormalised_ones(via, through):
    other = via.transition([ls.CoaxPort("P0", dk=1.524, z_ref=42), line(z_ref=75)])
    assert other.reference == (42, 75)
    assert np.abs(ls.renormalise(through.s(F), through.reference, other.reference) - other.s(F)).max() < 1e-12


def test_a_longer_line_is_a_line_behind(via, through):
    more = via.transition([PORTS[0], line(distance=5e-3)])
    gamma = 2j * np.pi * F / 299792458 * np.sqrt(3.5 * (1 - 0.005j))
    behind = np.zeros((F.size, 2, 2), complex)
    behind[:, 0, 1] = behind[:, 1, 0] = np.exp(-gamma * 3e-3)
    z = 48.8 / np.sqrt(1 - 0.005j)             # a lossy line of C' lossy, and its reference real
    assert np.abs(ls.cascade(through.s(F), ls.renormalise(behind, z, 48.8 + 0j)) - more.s(F)).max() < 0.01


def test_notch(through, via):
    first, *rest = through.notches(up_to=60e9)
    assert rest == [] and first.depth_db < -25 and first.stub == -1 and np.isnan(first.error)
    assert first.f == pytest.approx(22.02e9, rel=0.005)
    near = np.linspace(first.f - 50e6, first.f + 50e6, 201)
    assert near[np.argmin(np.abs(through.s(near)[:, 1, 0]))] == pytest.approx(first.f, abs=1e6)
    assert through.notches(up_to=60e9, to=0, from_=1)[0].f == pytest.approx(first.f, rel=1e-6)
    assert through.notches(up_to=20e9) == []
    assert first.f == pytest.approx(via.model().notches(60e9)[0].f, rel=0.005)


def test_what_the_stub_does(via, through):
    bare = via.transition(PORTS, stubs="removed")
    assert bare.notches(up_to=60e9) == [] and bare.stubs == "removed" and through.stubs == "kept"
    k = F < 20e9
    assert (np.abs(bare.s(F)[k, 1, 0]) > np.abs(through.s(F)[k, 1, 0])).all()
    drilled = via.replace(backdrills=[ls.BackDrill("bottom", 0.95e-3, 0.45e-3)]).transition(PORTS)
    between = np.abs(drilled.s(14e9)[1, 0])
    assert np.abs(through.s(14e9)[1, 0]) < between < np.abs(bare.s(14e9)[1, 0]) + 0.01


def test_copper_takes_its_part(via):
    s = {metal: via.transition(PORTS, metal=metal).s(F) for metal in ("lossy", "perfect")}
    assert (ls.passivity(s["lossy"]) < ls.passivity(s["perfect"])).mean() > 0.9
    assert via.transition(PORTS, metal="perfect").metal == "perfect"


def test_three_layers(board):
    ports = [*PORTS, line("T6")]
    tap = make_via(board, connects=("P0", "T3", "T6"), pads={"T3": 0.45e-3, "T6": 0.45e-3}).transition(ports)
    s = tap.s(F)
    assert s.shape == (60, 3, 3) and ls.passivity(s).max() <= 1 and ls.reciprocity(s).max() < 1e-11
    swapped = make_via(board, connects=("P0", "T3", "T6"), pads={"T3": 0.45e-3, "T6": 0.45e-3}).transition([ports[2], ports[0], ports[1]])
    assert np.abs(ls.port_map(s, [2, 0, 1]) - swapped.s(F)).max() < 1e-12


def test_traces_by_their_cross_section(via, through):
    core = ls.Dielectric(3.5, 0.005, f_ref=20e9)
    strip = ls.Stripline(width=0.113e-3, height_below=0.1e-3, height_above=0.1e-3, dielectric_below=core)
    given = strip.line(20e9)
    made = via.transition([PORTS[0], ls.TracePort("T3", trace=strip, distance=2e-3, z_ref=48.8)])
    like = via.transition([PORTS[0], line(impedance=given.z.real)])
    assert np.abs(made.s(F) - like.s(F)).max() < 0.03
    with pytest.raises(ls.GeometryError, match="ports.1.*trace"):
        via.transition([PORTS[0], ls.TracePort("T3", trace=strip, impedance=50)])


def test_remarks(board):
    far = make_via(board, returns=None)
    lonely = far.transition(PORTS)          # power leaves, and the model says how much: no warning
    assert len(lonely.remarks) == 1 and "no return via" in lonely.remarks[0]
    assert lonely.notches(up_to=60e9)[0].depth_db > -12
    wide = make_via(board, antipad=1.4e-3, returns=ls.Ring(6, 1.5e-3))
    with pytest.warns(ls.RangeWarning, match="Transition: .*launch") as caught:
        remarks = wide.transition(PORTS).remarks
    assert len(remarks) == 1 and len(caught) == 1 and caught[0].filename == __file__


def test_beyond_the_range(through):
    with pytest.warns(ls.RangeWarning, match="Transition.s: 1 of 3 items"):
        through.s([1e9, 2e9, 115e9])


# ---- pairs ----------------------------------------------------------------------------------------------


def test_a_pair_is_its_modes(pair):
    s = pair.s(F)
    assert s.shape == (60, 4, 4) and pair.reference == (50, 48.8, 50, 48.8)
    assert ls.passivity(s).max() <= 1 and ls.reciprocity(s).max() < 1e-11
    assert (ls.port_map(s, [2, 3, 0, 1]) == s).all()        # equal barrels
    mixed = ls.to_mixed(s, PAIR, z=pair.reference)
    assert mixed.z == pytest.approx([100, 97.6, 25, 24.4])
    assert np.abs(mixed.s[:, :2, 2:]).max() < 1e-12 and np.abs(mixed.s[:, 2:, :2]).max() < 1e-12
    assert np.abs(mixed.s[:, :2, :2] - (s[:, :2, :2] - s[:, :2, 2:])).max() < 1e-12
    assert np.abs(mixed.s[:, 2:, 2:] - (s[:, :2, :2] + s[:, :2, 2:])).max() < 1e-12


def test_notches_of_modes(pair):
    s, found = {}, {}
    for mode, sign in (("odd", -1), ("even", 1)):
        found[mode] = pair.notches(up_to=60e9, mode=mode)[0]
        near = np.linspace(0.99, 1.01, 401) * found[mode].f
        s = pair.s(near)
        assert near[np.argmin(np.abs(s[:, 1, 0] + sign * s[:, 1, 2]))] == pytest.approx(found[mode].f, rel=1e-4)
    assert found["even"].f < 0.8 * found["odd"].f and found["odd"].depth_db < -25
    with pytest.raises(ls.ArgumentError, match="mode = 'common': must be 'single', 'odd' or 'even'"):
        pair.notches(up_to=60e9, mode="common")
    with pytest.raises(ls.ArgumentError, match="to = 2"):
        pair.notches(up_to=60e9, mode="odd", to=2)


def test_unequal_barrels_convert_modes(board, pair):
    own = pair_via(board, pair=ls.Pair(0.9e-3, backdrills=[ls.BackDrill("bottom", 0.6e-3, 0.25e-3)]), hole_dk=3.5)
    with pytest.warns(ls.RangeWarning, match="Transition"):
        unequal = own.transition(PORTS)
    s = unequal.s(F)
    assert s.shape == (60, 4, 4) and ls.passivity(s).max() <= 1 and ls.reciprocity(s).max() < 1e-11
    mixed = ls.to_mixed(s, PAIR, z=unequal.reference).s
    assert np.abs(mixed[F < 30e9, 3, 0]).max() > 0.1
    assert np.abs(s[:, 1, 0]).argmin() != np.abs(s[:, 3, 2]).argmin()
    none = pair_via(board, pair=ls.Pair(0.9e-3, backdrills=[])).transition(PORTS)        # its own drills: none, as the barrel has
    assert np.abs(none.s(F) - pair.s(F)).max() < 1e-9


def test_one_slot_for_both(board, pair):
    slot = pair_via(board, pair=ls.Pair(0.9e-3, shared=True)).transition(PORTS)
    assert slot.notches(up_to=60e9, mode="odd")[0].f > 1.01 * pair.notches(up_to=60e9, mode="odd")[0].f


# ---- what is new around a via ---------------------------------------------------------------------------


def test_spans_of_return_vias(board, via, through):
    places = via.returns.positions
    whole = via.replace(returns=ls.Vias(places, spans=[("P0", "P9"), None, ("P0", "P9"), (0, "P9")]))
    assert np.abs(whole.transition(PORTS).s(F) - through.s(F)).max() < 1e-9
    half = via.replace(returns=ls.Vias(places, spans=[("P0", "P5")] * 4))
    assert half.transition(PORTS).notches(up_to=60e9)[0].f < 0.98 * through.notches(up_to=60e9)[0].f
    assert whole.returns.spans[3] == ("P0", "P9") and "spans=(('P0', 'P5')," in repr(half)
    for same in (half, whole):
        again = pickle.loads(pickle.dumps(same))
        assert again == same and hash(again) == hash(same)
    assert half.replace(drill=0.2e-3).returns == half.returns != whole.returns


@pytest.mark.parametrize(
    "spans, error, message",
    [
        ([("P0", "P5")], ls.ArgumentError, r"spans: 1: must be as many as positions \(4\)"),
        ([("P0",)] * 4, ls.ArgumentError, r"spans\[0\]: 1 layers: must be two"),
        (["P0"] * 4, TypeError, r"spans\[0\]: must be a pair of layers or None, not str"),
        ("P0", TypeError, "spans: must be a sequence"),
        ([("P0", "none")] * 4, ls.NoSuchError, r"spans\[0\]: .*'none'"),
        ([("P5", "P0")] * 4, ls.LibstubError, "return_spans"),
        ([("P0", "D1")] * 4, ls.LibstubError, "return_spans"),
    ],
)
def test_spans_that_are_wrong(via, spans, error, message):
    with pytest.raises(error, match=message):
        via.replace(returns=ls.Vias(via.returns.positions, spans=spans))


def test_edges(via):
    """The sum over a rectangle's images takes its time: few frequencies, and a small board."""
    f, lonely = np.array([2e9, 8e9, 14e9, 20e9]), via.replace(returns=None)
    bare, shorted = (lonely.replace(edges=ls.Edges(1.5e-3, 1.6e-3, 1.7e-3, 1.4e-3, shorted=s)) for s in (False, True))
    s = {name: v.transition(PORTS) for name, v in (("bare", bare), ("shorted", shorted), ("none", lonely))}
    assert s["bare"].remarks == s["shorted"].remarks == () and len(s["none"].remarks) == 1
    s = {name: transition.s(f) for name, transition in s.items()}
    assert ls.passivity(s["shorted"]).max() <= 1 and max(ls.reciprocity(one).max() for one in s.values()) < 1e-11
    for name, other in (("bare", "shorted"), ("bare", "none"), ("shorted", "none")):
        assert np.abs(s[name] - s[other]).max() > 0.01
    assert shorted.edges.shorted and pickle.loads(pickle.dumps(shorted)) == shorted != bare and "edges=Edges(left=1.5 mm" in repr(bare)
    for wrong, error in ((dict(left=0), ls.ArgumentError), (dict(right="x"), TypeError), (dict(shorted=1), TypeError)):
        with pytest.raises(error, match=next(iter(wrong))):
            ls.Edges(**{**dict(left=1e-3, right=1e-3, front=1e-3, back=1e-3), **wrong})
    with pytest.raises(TypeError, match="edges: must be Edges or None"):
        via.replace(edges=(1, 1, 1, 1))
    with pytest.raises(ls.LibstubError, match="edges"):
        via.replace(edges=ls.Edges(0.1e-3, 1e-3, 1e-3, 1e-3)).transition(PORTS)


def test_planes_that_end_are_passive(via):
    f, edges = np.array([2e9, 8e9, 20e9, 40e9]), ls.Edges(1.5e-3, 1.6e-3, 1.7e-3, 1.4e-3)
    assert ls.passivity(via.replace(returns=None, edges=edges).transition(PORTS).s(f)).max() <= 1
    assert ls.passivity(via.replace(edges=edges).transition(PORTS).s(f)).max() <= 1


def test_partner_pickles(board):
    via = pair_via(board, pair=ls.Pair(0.9e-3, True, [ls.BackDrill("bottom", 0.6e-3, 0.4e-3)]))
    again = pickle.loads(pickle.dumps(via))
    assert again == via and again.pair.backdrills == via.pair.backdrills and hash(again) == hash(via)
    with pytest.raises(TypeError, match="backdrills: must be a sequence of BackDrill"):
        ls.Pair(0.9e-3, backdrills=[1])


# ---- the object -----------------------------------------------------------------------------------------


def test_it_pickles_and_tells(through, via):
    for transition in (through, via.transition(PORTS, stubs="removed", metal="perfect", annuli=6)):
        again = pickle.loads(pickle.dumps(transition))
        assert repr(again) == repr(transition) and (again.s(F) == transition.s(F)).all() and again.via == via
    assert repr(transition) == "Transition(2 ports; stubs='removed', metal='perfect', annuli=6)" and transition.annuli == 6
    assert repr(PORTS[0]) == "CoaxPort(layer='P0', dk=1.524)"
    assert pickle.loads(pickle.dumps(PORTS)) == PORTS
    with pytest.raises(AttributeError):
        through.stubs = "removed"


@pytest.mark.parametrize(
    "ports, error, message",
    [
        ([], ls.ArgumentError, "count"),
        ("ports", TypeError, "ports: must be a sequence"),
        ([1], TypeError, r"ports\[0\]: must be a TracePort or a CoaxPort, not int"),
        ([line("T6")], ls.GeometryError, "ports.0.*not one that the via connects"),
        ([line("nowhere")], ls.NoSuchError, "nowhere"),
        ([line(), line()], ls.GeometryError, "port 0 already"),
        ([ls.CoaxPort("T3")], ls.UnsupportedError, "ports.0.*coaxial"),
        ([line("P0")], ls.UnsupportedError, "ports.0.*plane"),
        ([line(impedance=0.5)], ls.ArgumentError, "impedance = 0.5"),
        ([line(impedance=None)], ls.ArgumentError, "impedance = 0 "),
        ([line(distance=0.1e-3)], ls.ArgumentError, "distance = 0.0001"),
        ([line(z_ref=5000)], ls.ArgumentError, "z_ref = 5000"),
        ([ls.CoaxPort("P0", dk=0.5)], ls.ArgumentError, "dk = 0.5"),
    ],
)
def test_ports_that_are_wrong(via, ports, error, message):
    with pytest.raises(error, match=message):
        via.transition(ports)


def test_arguments_that_are_wrong(via):
    for keywords, error, message in (
        (dict(stubs="gone"), ls.ArgumentError, "stubs = 'gone': must be 'kept' or 'removed'"),
        (dict(stubs=None), TypeError, "stubs: must be"),
        (dict(metal="gold"), ls.ArgumentError, "metal = 'gold'"),
        (dict(annuli=0), ls.ArgumentError, "annuli = 0: must be >= 2 and <= 12"),
        (dict(annuli=13), ls.ArgumentError, "annuli = 13"),
        (dict(annuli=4.0), TypeError, "annuli: must be an integer"),
    ):
        with pytest.raises(error, match=message):
            via.transition(PORTS, **keywords)
    with pytest.raises(TypeError, match="via: must be a Via"):
        ls.Transition("via", PORTS)
    for make in (lambda: ls.TracePort(1.5), lambda: ls.CoaxPort(None), lambda: ls.TracePort(True)):
        with pytest.raises(TypeError, match="layer: must be a name or an index"):
            make()
    for name in ("impedance", "dk", "width", "distance", "z_ref"):
        with pytest.raises(ls.ArgumentError, match=f"{name} = 0: must be > 0"):
            ls.TracePort("T3", **{name: 0})
    with pytest.raises(TypeError, match="trace: must be a Microstrip"):
        ls.TracePort("T3", trace=50.0)


def test_pair_without_modes_has_none(through):
    with pytest.raises(ls.NoSuchError, match="mode"):
        through.notches(up_to=60e9, mode="odd")
    for wrong, error in ((dict(to=5), ls.ArgumentError), (dict(from_="0"), TypeError), (dict(to=True), TypeError)):
        with pytest.raises(error):
            through.notches(up_to=60e9, **wrong)


def test_it_is_a_network_of_scikit_rf(through, pair):
    skrf = pytest.importorskip("skrf", reason="needs scikit-rf")
    for transition in (through, pair):
        s = transition.s(F)
        made = skrf.Network(f=F, f_unit="hz", s=s, z0=transition.reference)
        made.renormalize(50)
        assert np.abs(made.s - ls.renormalise(s, transition.reference, 50)).max() < 1e-9
        assert made.is_passive() and made.is_reciprocal(tol=1e-9)


def test_long_calls_release_the_gil(through):
    f = np.linspace(1e9, 60e9, 20_000)
    start = time.perf_counter()
    through.s(f)
    seconds = time.perf_counter() - start
    worker, ticks = threading.Thread(target=through.s, args=(f,)), 0
    worker.start()
    while worker.is_alive():
        time.sleep(0.001)
        ticks += 1
    worker.join()
    assert ticks > 20 * seconds         # held throughout: one or two
