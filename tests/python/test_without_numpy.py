"""The package where NumPy is not installed, and one that does not load NumPy before it needs it."""

import subprocess
import sys
import textwrap

import pytest


def run(code):
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", textwrap.dedent(code)], capture_output=True, text=True, cwd=__file__.rpartition("/")[0]
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def test_import_does_not_load_numpy():
    assert run("import sys, libstub; libstub.mil(1); print('numpy' in sys.modules)") == "False\n"


WITHOUT = """
import sys
sys.modules["numpy"] = None
import array
import libstub as ls
from conftest import make_stackup, make_via
model = make_via(make_stackup(ls.Dielectric(3.6, 0.004))).model()
"""


def test_arrays_without_numpy():
    run(
        WITHOUT
        + """
f = [1e9, 2e9, 3e9]
zin = model.zin(f)
assert type(zin) is ls.ComplexArray and len(zin) == 3
assert zin.tolist() == list(zin) == [model.zin(x) for x in f]
assert zin[-1] == zin[2] and type(zin[0]) is complex
assert list(zin.real_imag()) == [part for z in zin for part in (z.real, z.imag)]
assert repr(zin) == "ComplexArray(3 values)"
try:
    zin[3]
except IndexError:
    pass
else:
    raise AssertionError("no IndexError")
view = memoryview(zin)
assert view.format == "Zd" and view.itemsize == 16 and view.shape == (3,) and view.strides == (16,) and view.c_contiguous
loss = model.added_loss(f)
assert type(loss) is array.array and len(loss) == 3
for same in (array.array("d", f), memoryview(array.array("d", f)), tuple(f), array.array("d", [1e9, 0, 2e9, 0, 3e9])):
    if len(same) == 5:
        same = memoryview(same)[::2]
    assert model.zin(same).tolist() == zin.tolist()
assert model.zin(array.array("q", [1000000000])).tolist() == [model.zin(1e9)]
assert len(model.zin([])) == 0 and model.zin([]).tolist() == []
out = array.array("d", bytes(48))
assert model.zin(f, out=out) is out and list(out) == list(zin.real_imag())
"""
    )


def test_errors_without_numpy():
    run(
        WITHOUT
        + """
for wrong in (["x"], [None], "1e9", [[1e9]], memoryview(bytes(16)).cast("B", (4, 4)), 7j, {1: 2}.keys()):
    try:
        model.zin(wrong)
    except (TypeError, ls.ArgumentError) as error:
        assert "f: " in str(error) or "freq" in str(error), error
    else:
        raise AssertionError(wrong)
"""
    )


def test_batches_without_numpy():
    run(
        WITHOUT
        + """
a, b = make_stackup(ls.Dielectric(3.6, 0.004)), make_stackup(ls.Dielectric(3.3, 0.004))
vias = [make_via(a), make_via(b), make_via(a)]
link, criteria = ls.Signal(10e9), ls.Criteria(2.0)
notches, margins = ls.first_notch_batch(vias), ls.margin_batch(vias, link, criteria)
assert type(notches.f1) is array.array and list(notches.status) == [0, 0, 0]
assert notches.f1[0] == notches.f1[2] < notches.f1[1]
assert [margins.f1[i] for i in range(3)] == [via.model().margin(link, criteria).f1 for via in vias]
assert list(ls.longest_stub_batch(vias, link, criteria).stub_length) == [ls.longest_stub(v, link, criteria).stub_length for v in vias]
assert len(ls.first_notch_batch([]).f1) == 0
"""
    )


def test_networks_without_numpy():
    run(
        WITHOUT
        + """
import io
f = [1e9, 2e9, 3e9]
s = ls.shunt(model.zin(f))
assert type(s) is ls.ComplexArray and s.shape == (3, 2, 2) and len(s) == 3 and len(s[0]) == len(s[0][0]) == 2
assert s.tolist() == list(s) == [s[i] for i in range(3)]
assert all(abs(m[1][0] - model.s21(x)) < 1e-12 for m, x in zip(s, f))
view = memoryview(s)
assert view.format == "Zd" and view.shape == (3, 2, 2) and view.strides == (64, 32, 16) and view.c_contiguous
assert len(s.real_imag()) == 24 and repr(s) == "ComplexArray(12 values)"
assert ls.cascade(s, s).tolist() == ls.cascade(s.tolist(), [[tuple(row) for row in m] for m in s]).tolist()
assert max(ls.passivity(s)) <= 1 and list(ls.reciprocity(s)) == [0, 0, 0]
assert ls.renormalise(ls.renormalise(s, 50, [42, 60]), [42, 60], 50)[1][1][0].real - s[1][1][0].real < 1e-12
out = io.BytesIO()
file = ls.Touchstone(f, s, unit="GHz")
file.write(out)
again = ls.Touchstone.parse(out.getvalue())
assert again.data.tolist() == s.tolist() and list(again.frequency) == f
core = ls.Dielectric(3.5, 0.005)
board = ls.Stackup([ls.Layer("A", "plane", 0), ls.Layer("D", "dielectric", 2e-4, dielectric=core), ls.Layer("B", "plane", 0),
                    ls.Layer("E", "dielectric", 1e-4, dielectric=core), ls.Layer("C", "signal", 0)])
via = ls.Via(board, drill=2.5e-4, antipad=7e-4, antipads={"A": 7e-4}, connects=("A",), returns=ls.Ring(4, 9e-4))
through = via.transition([ls.CoaxPort("A")])
assert through.s(f).shape == (3, 1, 1) and through.s(1e9).tolist() == through.s(f)[0]
for call in (lambda: ls.passivity([[[1], [2, 3]]]), lambda: ls.passivity([[["x"]]]), lambda: ls.passivity(1j), lambda: ls.renormalise(s, 50, 50j)):
    try:
        call()
    except (TypeError, ls.ArgumentError) as error:
        assert "s: " in str(error) or "z_from: complex references need NumPy" in str(error), error
    else:
        raise AssertionError(call)
"""
    )


def test_numpy_reads_a_complex_array_without_a_copy():
    np = pytest.importorskip("numpy")
    from libstub import _core

    array = _core.complex_array(3)
    seen = np.asarray(array)
    assert seen.dtype == np.complex128 and seen.shape == (3,)
    seen[1] = 1 + 2j
    assert array[1] == 1 + 2j and len(np.asarray(_core.complex_array(0))) == 0
    cube = np.asarray(_core.complex_array((2, 3, 4)))
    assert cube.shape == (2, 3, 4) and cube.flags.c_contiguous and np.asarray(_core.complex_array((0, 2, 2))).shape == (0, 2, 2)
    for wrong in (-1, (), (1, 2, 3, 4), (2, -1)):
        with pytest.raises(ValueError):
            _core.complex_array(wrong)
    with pytest.raises(TypeError):
        _core.complex_array("x")
    with pytest.raises(MemoryError):
        _core.complex_array((2**40, 2**40))
    with pytest.raises(MemoryError):
        _core.complex_array(2**62)
