"""Networks: against scikit-rf to 1e-9, shapes, what is refused, what is marked."""

import math
import pickle
import warnings

import pytest

import libstub as ls

np = pytest.importorskip("numpy")

RNG = np.random.default_rng(4)
FREQ = np.linspace(0.1e9, 40e9, 400)


def random_networks(n, p):
    return (RNG.normal(size=(n, p, p)) + 1j * RNG.normal(size=(n, p, p))) / np.sqrt(2 * p)


def line(delay, f=FREQ, loss=0.0):
    """A matched line: |S21| 10^(-loss/20) at 10 GHz, of a skin effect with its reactance; its delay in s."""
    s = np.zeros((f.size, 2, 2), complex)
    s[:, 0, 1] = s[:, 1, 0] = np.exp(-2j * np.pi * f * delay - (1 + 1j) * loss / 8.686 * np.sqrt(f / 10e9))
    return s


@pytest.fixture(scope="module")
def skrf():
    return pytest.importorskip("skrf", reason="needs scikit-rf")


def network(skrf, s, z=50.0, f=None):
    """Our arrays, as they are."""
    f = 1e9 * np.arange(1, len(s) + 1) if f is None else f
    return skrf.Network(f=f, f_unit="hz", s=s, z0=z)


# ---- against scikit-rf ----------------------------------------------------------------------------------


@pytest.mark.parametrize("p", [1, 2, 4, 7])
def test_renormalise(skrf, p):
    s, a, b = random_networks(6, p), RNG.uniform(10, 150, p), RNG.uniform(10, 150, p)
    own = ls.renormalise(s, a, b)
    theirs = network(skrf, s, a)
    theirs.renormalize(b)
    assert own.shape == s.shape and own.dtype == np.complex128 and np.abs(own - theirs.s).max() < 1e-9
    assert np.abs(ls.renormalise(own, b, a) - s).max() < 1e-12
    assert np.abs(ls.renormalise(s, 50, 75) - ls.renormalise(s, [50.0] * p, np.full(p, 75))).max() == 0


def test_renormalise_to_complex_references(skrf):
    s, a = random_networks(6, 3), RNG.uniform(10, 150, (6, 3)) * (1 + 0.3j * RNG.normal(size=(6, 3)))
    theirs = skrf.network.renormalize_s(s, np.full((6, 3), 50.0), a, s_def="power")
    own = ls.renormalise(s, 50.0, a)
    assert np.abs(own - theirs).max() < 1e-9
    assert np.abs(ls.renormalise(s, 50.0, a[0])[0] - own[0]).max() < 1e-15
    assert np.abs(ls.renormalise(s, 50 + 0j, 75 + 0j) - ls.renormalise(s, 50, 75)).max() < 1e-14
    assert np.abs(ls.renormalise(s, a.real, 50.0) - skrf.network.renormalize_s(s, a.real, np.full((6, 3), 50.0))).max() < 1e-9


@pytest.mark.parametrize("kind, name", [("Z", "z"), ("Y", "y"), ("ABCD", "a"), ("H", "h"), ("G", "g")])
def test_convert(skrf, kind, name):
    s, z = random_networks(6, 2), np.array([42.0, 61.0])
    theirs = getattr(skrf.network, f"s2{name}")(s, np.broadcast_to(z, (6, 2)))
    own = ls.convert(s, "S", kind, z=z)
    assert np.abs(own / theirs - 1).max() < 1e-9
    assert np.abs(ls.convert(own, kind, "S", z=z) - s).max() < 1e-9


@pytest.mark.parametrize("p", [2, 4, 8])
def test_cascade_and_deembed(skrf, p):
    a, b, c = (random_networks(6, p) for _ in range(3))
    theirs = network(skrf, a) ** network(skrf, b) ** network(skrf, c)
    own = ls.cascade(a, b, c)
    assert np.abs(own - theirs.s).max() < 1e-9
    assert np.abs(ls.deembed(own, a, c) - b).max() < 1e-9
    assert np.abs(ls.deembed(own, left=a) - ls.cascade(b, c)).max() < 1e-9
    assert np.abs(ls.deembed(own, right=c) - (network(skrf, a) ** network(skrf, b)).s).max() < 1e-9
    assert np.abs((network(skrf, a).inv ** network(skrf, own) ** network(skrf, c).inv).s - b).max() < 1e-9


def test_mixed_modes(skrf):
    s, z = random_networks(6, 5), np.array([50.0, 50.0, 42.0, 42.0, 75.0])
    theirs = network(skrf, s, z)
    theirs.se2gmm(p=2)
    mixed = ls.to_mixed(s, [(0, 1), (2, 3)], z=z)
    assert np.abs(mixed.s - theirs.s).max() < 1e-9
    assert mixed.z == pytest.approx(theirs.z0[0].real) and mixed.z == pytest.approx([100, 84, 25, 21, 75])
    assert np.abs(ls.to_single(mixed.s, [(0, 1), (2, 3)], z=z) - s).max() < 1e-12
    other = ls.to_mixed(ls.port_map(s, [0, 2, 1, 3, 4]), [(0, 2), (1, 3)], z=z[[0, 2, 1, 3, 4]])
    assert np.abs(other.s - mixed.s).max() < 1e-15


def test_shunt(skrf):
    zin = RNG.normal(size=6) * 40 + 1j * RNG.normal(size=6) * 40
    medium = skrf.media.DefinedGammaZ0(skrf.Frequency(1, 6, 6, "GHz"), z0=50)
    reflection = network(skrf, ((zin - 50) / (zin + 50)).reshape(6, 1, 1))
    theirs = medium.shunt(reflection)
    own = ls.shunt(zin)
    assert own.shape == (6, 2, 2) and np.abs(own - theirs.s).max() < 1e-9
    assert ls.shunt([complex(np.inf, 0)]).tolist() == [[[0, 1], [1, 0]]]


def test_stub_is_the_shunt_of_its_impedance(model):
    f = FREQ[10:200]
    assert np.abs(ls.shunt(model.zin(f))[:, 1, 0] - model.s21(f)).max() < 1e-12
    channel, stub = line(0.2e-9, f, 3.0), ls.shunt(model.zin(f))
    with_stub = ls.cascade(channel, stub, channel)
    assert np.abs(ls.deembed(with_stub, channel, channel) - stub).max() < 1e-9


# ---- checks ---------------------------------------------------------------------------------------------


def test_passivity_and_reciprocity():
    s = random_networks(5, 3)
    assert ls.passivity(s) == pytest.approx(np.linalg.svd(s, compute_uv=False).max(axis=1), rel=1e-12)
    assert ls.reciprocity(s) == pytest.approx(np.abs(s - s.transpose(0, 2, 1)).max(axis=(1, 2)), rel=1e-12)
    assert ls.passivity(s[0]) == pytest.approx(ls.passivity(s)[0]) and isinstance(float(ls.reciprocity(s[0])), float)
    assert ls.passivity(line(1e-9)) == pytest.approx(1, abs=1e-12) and ls.reciprocity(line(1e-9)).max() == 0


def test_causality():
    f = np.linspace(0, 40e9, 401)
    late = ls.causality(f, line(0.5e-9, f))
    assert late.early.shape == (2, 2) and late.early[1, 0] < 1e-7 and late.resolution == pytest.approx(1.67 / 40e9, rel=0.01)
    assert ls.causality(f, line(0.5e-9, f, 3.0), t0=0.7e-9).early[1, 0] > 0.5
    assert ls.causality(f, line(-0.2e-9, f)).early[1, 0] > 0.9


# ---- over time ------------------------------------------------------------------------------------------


def test_step_response():
    f = np.linspace(0, 40e9, 401)
    t = np.array([[-0.1e-9, 0.3e-9], [0.7e-9, 2e-9]])
    out = ls.step_response(f, line(0.5e-9, f), t, rise_time=50e-12)
    assert out.shape == (2, 2) and out.ravel() == pytest.approx([0, 0, 1, 1], abs=1e-6)
    assert ls.step_response(f, line(0.5e-9, f), 0.5e-9, rise_time=50e-12) == pytest.approx(0.5, abs=1e-6)
    assert ls.step_response(f, line(0.5e-9, f), 1e-9, rise_time=50e-12, to=0) == pytest.approx(0, abs=1e-9)
    with pytest.warns(ls.RangeWarning, match="step_response"):
        ls.step_response(f, line(0.5e-9, f), 1e-9, rise_time=5e-12)


def test_tdr():
    f = np.linspace(0, 40e9, 401)
    between = ls.renormalise(line(0.5e-9, f), 80, 50)
    z = ls.tdr(f, between, [-0.1e-9, 0.5e-9, 2e-9], rise_time=50e-12)
    assert z[0] == pytest.approx(50, rel=1e-3)      # reflections to and fro never end, and wrap round
    assert z[1] == pytest.approx(80, rel=1e-6) and z[2] == pytest.approx(50, rel=0.02)
    assert ls.tdr(f, np.full((f.size, 1, 1), 0.5), 1e-9, rise_time=50e-12, z_ref=42) == pytest.approx(126, rel=1e-6)


def test_insertion_loss_deviation():
    f = np.linspace(0.1e9, 30e9, 300)
    smooth = 0.1 + 2e-5 * np.sqrt(f) + 3e-10 * f + 1e-21 * f**2
    found = ls.insertion_loss_deviation(f, smooth, constant=True)
    assert found.rms < 1e-9 and (found.a0, found.a1, found.a2, found.a4) == pytest.approx((0.1, 2e-5, 3e-10, 1e-21), rel=1e-6)
    assert math.isnan(found.fom) and found.points == 300 and found.deviation.shape == f.shape
    ripple = 0.1 * np.sin(2 * np.pi * f / 1e9)
    part = ls.insertion_loss_deviation(f, smooth + ripple, constant=True, f_low=5e9, f_high=25e9, symbol_rate=53.125e9,
                                       transition_time=6e-12, weighted=True)
    assert np.isnan(part.deviation[f < 4.9e9]).all() and part.rms == pytest.approx(0.1 / math.sqrt(2), rel=0.05)
    assert part.greatest == pytest.approx(np.nanmax(np.abs(part.deviation))) and 0 < part.fom < part.rms
    assert part.points == np.isfinite(part.deviation).sum() == ((f >= 5e9) & (f <= 25e9)).sum()


# ---- what goes in, what comes out -----------------------------------------------------------------------


def test_shapes():
    s = random_networks(24, 2)
    assert ls.renormalise(s.reshape(2, 3, 4, 2, 2), 50, 75).shape == (2, 3, 4, 2, 2)
    assert (ls.renormalise(s[0], 50, 75) == ls.renormalise(s, 50, 75)[0]).all()
    assert ls.cascade(s[:0], s[:0]).shape == (0, 2, 2)
    for same in (s.tolist(), np.asfortranarray(s), s[::-1].copy()[::-1], s.astype(">c16"), np.repeat(s, 2, axis=0)[::2]):
        assert (ls.port_map(same, [1, 0]) == s[:, ::-1, ::-1]).all()
    assert (ls.convert(np.eye(2).reshape(1, 2, 2), "Z", "Y") == np.eye(2)).all()
    assert ls.port_map(s, [1]).shape == (24, 1, 1)


@pytest.mark.parametrize(
    "call, error, message",
    [
        (lambda s: ls.renormalise(s[0, 0], 50, 75), ls.ArgumentError, r"s: an array of shape \(2,\): must be \(n, p, p\)"),
        (lambda s: ls.renormalise(s[:, :1], 50, 75), ls.ArgumentError, r"s: an array of shape \(3, 1, 2\)"),
        (lambda s: ls.renormalise("s", 50, 75), TypeError, "s: must be numbers"),
        (lambda s: ls.renormalise(s, 50, [75, 75, 75]), ls.ArgumentError, r"z_to: an array of shape \(3,\): must be"),
        (lambda s: ls.renormalise(s, -50, 75), ls.ArgumentError, "z_from"),
        (lambda s: ls.renormalise(s, 50, 0j), ls.ArgumentError, "z_to"),
        (lambda s: ls.renormalise(s, 50, None), (TypeError, ValueError), "z_to"),
        (lambda s: ls.renormalise(s, 50, 75, errors="ignore"), ls.ArgumentError, "errors = 'ignore'"),
        (lambda s: ls.renormalise(np.zeros((1, 17, 17)), 50, 75), ls.ArgumentError, "s: 17 ports: must be >= 1 and <= 16"),
        (lambda s: ls.convert(s, "S", "T"), ls.ArgumentError, "to = 'T': must be 'S', 'Z', 'Y', 'ABCD', 'G' or 'H'"),
        (lambda s: ls.convert(s, 1, "Z"), TypeError, "from_: must be"),
        (lambda s: ls.convert(np.zeros((1, 3, 3)), "S", "ABCD"), ls.LibstubError, "even"),
        (lambda s: ls.cascade(s, s[:2]), ls.ArgumentError, r"b: an array of shape \(2, 2, 2\): must be \(3, 2, 2\) as a"),
        (lambda s: ls.cascade(s, s, s[:, :1, :1]), ls.ArgumentError, r"more\[0\]: an array"),
        (lambda s: ls.cascade(np.zeros((1, 3, 3)), np.zeros((1, 3, 3))), ls.LibstubError, "even"),
        (lambda s: ls.deembed(s, s[:1]), ls.ArgumentError, r"left: an array of shape \(1, 2, 2\): must be \(3, 2, 2\) as measured"),
        (lambda s: ls.to_mixed(s, [(0, 0)]), ls.ArgumentError, "pair"),
        (lambda s: ls.to_mixed(s, [(0, 1, 2)]), ls.ArgumentError, r"pairs\[0\]: 3 ports: must be two"),
        (lambda s: ls.to_mixed(s, [0, 1]), TypeError, r"pairs\[0\]: must be two ports, not int"),
        (lambda s: ls.to_mixed(s, "ab"), TypeError, "pairs: must be a sequence"),
        (lambda s: ls.to_single(s, [(0, 5)]), ls.ArgumentError, "pair"),
        (lambda s: ls.shunt(25.0, z_ref=0), ls.ArgumentError, "z_ref"),
        (lambda s: ls.port_map(s, [0, 0]), ls.ArgumentError, "map"),
        (lambda s: ls.port_map(s, 1), TypeError, "ports: must be a sequence"),
        (lambda s: ls.port_map(s, [0] * 17), ls.ArgumentError, "17 ports"),
        (lambda s: ls.causality([1e9, 2e9], s), ls.ArgumentError, r"s: an array of shape \(3, 2, 2\): must be \(n, p, p\) for n frequencies"),
        (lambda s: ls.step_response(FREQ, line(1e-9), 0.0, rise_time=-1.0), ls.ArgumentError, "rise_time"),
        (lambda s: ls.step_response(FREQ, line(1e-9), 0.0, rise_time=5e-11, to=2), ls.ArgumentError, "to = 2"),
        (lambda s: ls.step_response(FREQ, line(1e-9), "x", rise_time=5e-11), TypeError, "t: must be"),
        (lambda s: ls.step_response(FREQ[::-1], line(1e-9), 0.0, rise_time=5e-11), ls.ArgumentError, "freq"),
        (lambda s: ls.tdr(FREQ, line(1e-9), 0.0, rise_time=5e-11, port=-1), ls.ArgumentError, "port = -1"),
        (lambda s: ls.tdr(FREQ, line(1e-9), 0.0, rise_time=5e-11, port=1.0), TypeError, "port: must be an integer"),
        (lambda s: ls.insertion_loss_deviation(FREQ, FREQ[:3]), ls.ArgumentError, "loss: an array of shape"),
        (lambda s: ls.insertion_loss_deviation(FREQ, FREQ * 0, f_high=0), ls.ArgumentError, "f_high = 0: must be > 0"),
        (lambda s: ls.insertion_loss_deviation(FREQ, FREQ * 0, f_low=50e9), ls.LibstubError, "f_low"),
    ],
)
def test_what_is_refused(call, error, message):
    with pytest.raises(error, match=message):
        call(random_networks(3, 2))


def test_points_that_fail():
    """A through has no Z: it raises, or is NaN where errors are marked, and its neighbours are what they are alone."""
    s = random_networks(4, 2)
    s[1], s[3] = [[0, 1], [1, 0]], np.nan
    with pytest.raises(ls.LibstubError) as caught:
        ls.convert(s, "S", "Z")
    assert caught.value.index == 1
    z = ls.convert(s, "S", "Z", errors="mark")
    assert np.isnan(z[[1, 3]]).all() and (z[[0, 2]] == ls.convert(s[[0, 2]], "S", "Z")).all()
    assert np.isnan(ls.passivity(s, errors="mark")).tolist() == [False, False, False, True]
    with pytest.raises(ls.ArgumentError):
        ls.passivity(s)
    with pytest.raises(ls.LibstubError):
        ls.convert(s, "S", "Z", z=-50, errors="mark")       # that concerns all of them


def test_nearly_singular_points_warn():
    s = np.array([[[0, 1 - 1e-12], [1 - 1e-12, 0]], [[0, 0.5], [0.5, 0]]], complex)
    with pytest.warns(ls.RangeWarning, match="convert: 1 of 2 items") as caught:
        ls.convert(s, "S", "Z")
    assert len(caught) == 1 and caught[0].filename == __file__
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        ls.convert(s[1:], "S", "Z")


def test_results_pickle():
    s = random_networks(3, 4)
    mixed = ls.to_mixed(s, [(0, 1)])
    again = pickle.loads(pickle.dumps(mixed))
    assert type(again) is ls.MixedMode and (again.s == mixed.s).all() and (again.z == mixed.z).all()
