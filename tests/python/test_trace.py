"""Traces and the surface of copper."""

import math
import pickle

import pytest

import libstub as ls

np = pytest.importorskip("numpy")

F = np.array([[1e9, 5e9], [10e9, 20e9]])
MU0 = 4e-7 * math.pi


@pytest.fixture(scope="module")
def core():
    return ls.Dielectric(3.6, 0.004)


def strip(core, **changes):
    return ls.Stripline(**{**dict(width=1e-4, height_below=1e-4, height_above=1e-4, dielectric_below=core, thickness=18e-6), **changes})


def micro(core, **changes):
    return ls.Microstrip(**{**dict(width=3e-4, height_below=1.5e-4, dielectric_below=core, thickness=35e-6), **changes})


def test_surface_of_smooth_copper():
    copper = ls.Conductor(4e7)
    z = copper.surface_impedance(F)
    assert z.shape == F.shape and z == pytest.approx((1 + 1j) * np.sqrt(np.pi * F * MU0 / 4e7), rel=1e-9)
    assert copper.surface_impedance(1e9).real == pytest.approx(1 / (4e7 * ls.skin_depth(4e7, 1e9)), rel=1e-9)


def test_roughness():
    f, smooth = np.geomspace(1e8, 1e11, 50), ls.Conductor().surface_impedance(np.geomspace(1e8, 1e11, 50))
    ratio = {law: ls.Conductor(roughness=4e-7, roughness_law=law).surface_impedance(f).real / smooth.real for law in ("hammerstad", "spheres")}
    depth = np.array([ls.skin_depth(5.8e7, x) for x in f])
    assert ratio["hammerstad"] == pytest.approx(1 + 2 / np.pi * np.arctan(1.4 * (4e-7 / depth) ** 2), rel=1e-3)
    assert (np.diff(ratio["spheres"]) > 0).all() and ratio["spheres"][-1] > ratio["hammerstad"][-1] > 1.5
    with pytest.raises(ls.ArgumentError, match="roughness_law = 'none': must be 'hammerstad' or 'spheres'"):
        ls.Conductor(roughness_law="none")
    with pytest.raises(ls.ArgumentError, match="roughness"):
        ls.Conductor(roughness=1e-3).surface_impedance(1e9)


def test_conductors_of_a_stackup_keep_their_law(core):
    rough = ls.Conductor(5e7, 4e-7, "spheres")
    board = ls.Stackup([ls.Layer("A", "signal", 1e-5, conductor=rough), ls.Layer("D", "dielectric", 1e-4, dielectric=core),
                        ls.Layer("B", "plane", 1e-5)])
    assert board["A"].conductor == rough and pickle.loads(pickle.dumps(board)) == board
    assert repr(rough) == "Conductor(conductivity=5e+07 S/m, roughness=0.4 um, roughness_law='spheres')"


def test_thin_stripline_is_exact(core):
    """Cohn: 30 pi/sqrt(Dk) K(k')/K(k), by the arithmetic-geometric mean."""
    def agm(a, b):
        while abs(a - b) > 1e-15 * a:
            a, b = (a + b) / 2, math.sqrt(a * b)
        return a

    lossless = ls.Dielectric(3.6, 0.0)
    k = math.tanh(math.pi * 1e-4 / (2 * 2e-4))
    wanted = 29.9792458 * math.pi / math.sqrt(3.6) * agm(1, math.sqrt(1 - k * k)) / agm(1, k)
    line = strip(lossless, thickness=0.0).line(1e9)
    assert line.z.real == pytest.approx(wanted, rel=1e-6)
    assert line.gamma == pytest.approx(2j * math.pi * 1e9 * math.sqrt(3.6) / 299792458, rel=1e-9, abs=1e-9)


def test_lines(core):
    for trace in (strip(core), micro(core), micro(core, dielectric_above=ls.Dielectric(3.3, 0.02), conductor=ls.Conductor(roughness=1e-6))):
        line = trace.line(F)
        assert line.z.shape == line.gamma.shape == F.shape and (line.gamma.real > 0).all() and (line.z.real > 20).all()
        one = trace.line(5e9)
        assert isinstance(one.z, complex) and one.z == line.z[0, 1] and one.gamma == line.gamma[0, 1]
        assert pickle.loads(pickle.dumps(trace)) == trace
    still = micro(core, dispersion=False)
    assert still.line(30e9).gamma.imag < micro(core).line(30e9).gamma.imag and "dispersion=False" in repr(still)
    rough = strip(core, conductor=ls.Conductor(roughness=1e-6))
    assert rough.line(10e9).gamma.real > 1.1 * strip(core).line(10e9).gamma.real
    assert repr(strip(core)).startswith("Stripline(width=0.1 mm, height_below=0.1 mm, height_above=0.1 mm, dielectric_below=")


def test_outside_the_stated_range(core):
    with pytest.warns(ls.RangeWarning, match="line: .*range") as caught:
        micro(core, width=1e-6, height_below=1e-3, thickness=0.0).line([1e9, 2e9])
    assert len(caught) == 1 and caught[0].filename == __file__


@pytest.mark.parametrize(
    "change, error, message",
    [
        (dict(width=0), ls.ArgumentError, "width = 0"),
        (dict(width="1"), TypeError, "width: must be a number, not str"),
        (dict(height_below=1.0), ls.ArgumentError, "height_below = 1 "),
        (dict(height_above=0), ls.ArgumentError, "height_above = 0: must be > 0"),
        (dict(thickness=-1e-6), ls.ArgumentError, "thickness"),
        (dict(dielectric_below=3.6), TypeError, "dielectric_below: must be a Dielectric, not float"),
        (dict(dielectric_above=3.6), TypeError, "dielectric_above: must be a Dielectric or None"),
        (dict(conductor=5.8e7), TypeError, "conductor: must be a Conductor or None"),
        (dict(conductor=ls.Conductor(1.0)), ls.ArgumentError, "conductivity"),
    ],
)
def test_checked_when_made(core, change, error, message):
    with pytest.raises(error, match=message):
        strip(core, **change)


def test_frequencies_out_of_range(core):
    with pytest.raises(ls.ArgumentError, match="freq") as caught:
        strip(core).line([1e9, 1e13])
    assert caught.value.index == 1
    with pytest.raises(ls.ArgumentError):
        ls.Conductor().surface_impedance(0)
    with pytest.raises(AttributeError):
        strip(core).width = 1
    with pytest.raises(TypeError):
        ls.Stripline(1e-4, 1e-4, 1e-4, core)        # keywords only
    with pytest.raises(TypeError, match="dispersion: must be True or False"):
        micro(core, dispersion=1)
