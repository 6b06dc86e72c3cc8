"""Touchstone files: round trips, against scikit-rf, file objects, what is refused."""

import gzip
import io
import pickle

import pytest

import libstub as ls

np = pytest.importorskip("numpy")

RNG = np.random.default_rng(8)


def networks(n, p):
    return RNG.normal(size=(n, p, p)) + 1j * RNG.normal(size=(n, p, p))


FREQ = np.cumsum(RNG.uniform(0.1e9, 1e9, 20))


@pytest.fixture(scope="module")
def skrf():
    return pytest.importorskip("skrf", reason="needs scikit-rf")


def text_of(file):
    out = io.BytesIO()
    file.write(out)
    return out.getvalue()


# ---- to a file and back ---------------------------------------------------------------------------------


@pytest.mark.parametrize("ports", [1, 2, 3, 4, 5, 16])
@pytest.mark.parametrize("version", [1, 2])
@pytest.mark.parametrize("unit", ["Hz", "GHz"])
def test_round_trip_is_exact(tmp_path, ports, version, unit):
    path, s = tmp_path / f"any.s{ports}p", networks(20, ports)
    file = ls.Touchstone(FREQ, s, reference=42.5, version=version, unit=unit, comments=["first", "second"])
    file.save(path)
    again = ls.Touchstone.load(path)
    assert (again.frequency == FREQ).all() and (again.data == s).all() and again.data.dtype == np.complex128
    assert again.reference == (42.5,) * ports and again.ports == ports and again.version == version and again.unit == unit
    assert [line.strip() for line in again.comments][:2] == ["first", "second"]
    assert (again.parameter, again.format, again.matrix, again.noise_points, again.rows) == ("S", "RI", "full", 0, None)
    assert ls.Touchstone.parse(path.read_bytes(), ports=ports).data.tobytes() == s.tobytes()
    assert ls.Touchstone.parse(path.read_text(), ports=ports).data.tobytes() == s.tobytes()


@pytest.mark.parametrize("format", ["MA", "DB"])
def test_magnitude_and_angle(format):
    s = networks(20, 2)
    again = ls.Touchstone.parse(text_of(ls.Touchstone(FREQ, s, format=format)))
    assert again.format == format and again.data == pytest.approx(s, rel=1e-13)


def test_all_that_version_2_says():
    s = networks(20, 4)
    s += s.transpose(0, 2, 1)
    rows = [("differential", 0, 2), ("common", 0, 2), ("single", 1, None), ls.TouchstoneRow("single", 3)]
    file = ls.Touchstone(FREQ, s, reference=[50, 75, 50, 42], version=2, matrix="lower", rows=rows)
    again = ls.Touchstone.parse(text_of(file))
    assert again.rows == tuple(ls.TouchstoneRow(*row) for row in rows) and again.rows[2].partner is None
    assert again.matrix == "lower" and again.reference == (50, 75, 50, 42) and (again.data == s).all()
    z = ls.Touchstone(FREQ, networks(20, 2), parameter="Z", version=2, order="12_21")
    again = ls.Touchstone.parse(text_of(z))
    assert again.parameter == "Z" and again.order == "12_21" and (again.data == z.data).all()


def test_digits():
    s = networks(20, 2)
    again = ls.Touchstone.parse(text_of(ls.Touchstone(FREQ, s, digits=5)))
    assert again.data == pytest.approx(s, rel=1e-4, abs=1e-4) and (again.data != s).any()


def test_functions_do_the_same(tmp_path):
    s, out = networks(20, 2), io.BytesIO()
    ls.touchstone_save(tmp_path / "x.s2p", FREQ, s, format="MA", reference=75)
    ls.touchstone_write(out, FREQ, s, format="MA", reference=75)
    assert (tmp_path / "x.s2p").read_bytes() == out.getvalue() == text_of(ls.Touchstone(FREQ, s, format="MA", reference=75))


# ---- with scikit-rf -------------------------------------------------------------------------------------


@pytest.mark.parametrize("ports", [1, 2, 3, 4])
@pytest.mark.parametrize("format", ["RI", "MA", "DB"])
def test_scikit_rf_reads_what_we_write(skrf, tmp_path, ports, format):
    path, s = tmp_path / f"ours.s{ports}p", networks(20, ports)
    ls.touchstone_save(path, FREQ, s, format=format, unit="GHz", reference=42.0)
    theirs = skrf.Network(str(path))
    assert np.abs(theirs.s - s).max() < 1e-9 and np.abs(theirs.f / FREQ - 1).max() < 1e-9 and (theirs.z0 == 42).all()


@pytest.mark.parametrize("ports", [1, 2, 3, 4])
@pytest.mark.parametrize("form", ["ri", "ma", "db"])
def test_we_read_what_scikit_rf_writes(skrf, tmp_path, ports, form):
    theirs = skrf.Network(f=FREQ, f_unit="hz", s=networks(20, ports), z0=50)
    theirs.write_touchstone(filename=f"theirs{ports}", dir=str(tmp_path), form=form)
    ours = ls.Touchstone.load(tmp_path / f"theirs{ports}.s{ports}p")
    assert ours.format == form.upper() and np.abs(ours.data - theirs.s).max() < 1e-9
    assert np.abs(ours.frequency / FREQ - 1).max() < 1e-9 and ours.reference == (50,) * ports


def test_a_file_becomes_a_network(skrf):
    file = ls.Touchstone.parse(text_of(ls.Touchstone(FREQ, networks(20, 4), reference=42)))
    made = skrf.Network(f=file.frequency, f_unit="hz", s=file.data, z0=file.reference)
    assert (made.s == file.data).all() and (made.z0 == 42).all() and (made.f == FREQ).all()


# ---- file objects ---------------------------------------------------------------------------------------


def test_compressed_files_and_pieces(tmp_path):
    file, path = ls.Touchstone(FREQ, networks(20, 3)), tmp_path / "x.s3p.gz"
    with gzip.open(path, "wb") as out:
        file.write(out)
    with gzip.open(path) as source:
        assert (ls.Touchstone.read(source, ports=3).data == file.data).all()

    class Slow(io.BytesIO):
        def read(self, size=-1):
            return super().read(min(size, 7))

        def write(self, chunk):
            return super().write(chunk[:11])

    out = Slow()
    file.write(out)
    assert out.getvalue() == text_of(file)
    assert (ls.Touchstone.read(Slow(out.getvalue()), ports=3).data == file.data).all()
    with open(tmp_path / "raw", "wb", buffering=0) as raw:
        file.write(raw)
    assert (tmp_path / "raw").read_bytes() == text_of(file)


class Failing:
    def __init__(self, result):
        self.result = result

    def read(self, size):
        if isinstance(self.result, BaseException):
            raise self.result
        return self.result(size) if callable(self.result) else self.result

    write = read


@pytest.mark.parametrize(
    "result, error, message",
    [
        (KeyError("mine"), KeyError, "mine"), ("text", TypeError, "binary"), (None, TypeError, "bytes-like"),
        (lambda size: b"x" * (size + 1), ValueError, "gave"), (KeyboardInterrupt(), KeyboardInterrupt, ""),
    ],
)
def test_files_that_fail_to_read(result, error, message):
    with pytest.raises(error, match=message or None):
        ls.Touchstone.read(Failing(result))
    with pytest.raises(AttributeError):
        ls.Touchstone.read(7)


@pytest.mark.parametrize(
    "result, error", [(KeyError("mine"), KeyError), (None, TypeError), (0, OSError), (10**9, OSError), (-1, OSError), ("x", TypeError)]
)
def test_files_that_fail_to_write(result, error):
    with pytest.raises(error):
        ls.Touchstone(FREQ, networks(20, 2)).write(Failing(result))


def test_text_files_say_so(tmp_path):
    with open(tmp_path / "x", "w") as out, pytest.raises(TypeError):
        ls.Touchstone(FREQ, networks(20, 2)).write(out)


# ---- what is refused ------------------------------------------------------------------------------------


def test_bad_files(tmp_path):
    with pytest.raises(ls.FormatError, match="line 3, column 3") as caught:
        ls.Touchstone.parse("# GHz S RI\n1 0 0\n2 x 0\n")
    assert caught.value.index == 3
    with pytest.raises(ls.FormatError):
        ls.Touchstone.parse(b"")
    with pytest.raises(ls.ReadError):
        ls.Touchstone.load(tmp_path / "none.s2p")
    with pytest.raises(ls.LibstubError):
        ls.Touchstone.parse("# GHz S RI\n1 0 0\n", ports=2)
    for wrong in (7, None, 1.5):
        with pytest.raises(TypeError):
            ls.Touchstone.load(wrong)
        with pytest.raises(TypeError):
            ls.Touchstone.parse(wrong)
    with pytest.raises(TypeError, match="ports: must be an integer"):
        ls.Touchstone.parse(b"# GHz S RI\n1 0 0\n", ports="1")
    with pytest.raises(ls.ArgumentError, match="ports"):
        ls.Touchstone.parse(b"# GHz S RI\n1 0 0\n", ports=17)


def test_a_file_that_cannot_be_written_stays(tmp_path):
    path = tmp_path / "x.s2p"
    path.write_text("mine")
    with pytest.raises(ls.LibstubError):
        ls.touchstone_save(path, FREQ[::-1], networks(20, 2))
    assert path.read_text() == "mine" and [p.name for p in tmp_path.iterdir()] == ["x.s2p"]
    with pytest.raises(ls.WriteError):
        ls.touchstone_save(tmp_path / "none" / "x.s2p", FREQ, networks(20, 2))


@pytest.mark.parametrize(
    "changes, error, message",
    [
        (dict(parameter="T"), ls.ArgumentError, "parameter = 'T'"),
        (dict(format="XY"), ls.ArgumentError, "format = 'XY': must be 'RI', 'MA' or 'DB'"),
        (dict(unit="THz"), ls.ArgumentError, "unit = 'THz': must be 'Hz', 'kHz', 'MHz' or 'GHz'"),
        (dict(matrix=3), TypeError, "matrix: must be"),
        (dict(order="x"), ls.ArgumentError, "order = 'x'"),
        (dict(version=3), ls.ArgumentError, "version = 3"),
        (dict(version="2"), TypeError, "version: must be an integer"),
        (dict(digits=18), ls.ArgumentError, "digits = 18"),
        (dict(reference=-50), ls.ArgumentError, "reference"),
        (dict(reference=[50, 50, 50]), ls.ArgumentError, "reference: an array of shape"),
        (dict(matrix="lower", version=2), ls.LibstubError, "lower|symmetr|data"),
        (dict(matrix="lower"), ls.LibstubError, "matrix"),
        (dict(rows=[("single", 0, None)] * 3, version=2), ls.ArgumentError, "rows: must be as many as ports"),
        (dict(rows=[("odd", 0, 1)] * 2), ls.ArgumentError, r"rows\[0\] = 'odd'"),
        (dict(comments="text"), TypeError, "comments: must be a sequence"),
        (dict(comments=[3]), TypeError, r"comments\[0\]: must be text"),
        (dict(comments=["a\0b"]), ls.ArgumentError, r"comments\[0\]: must not hold a null"),
        (dict(frequency=FREQ[:5]), ls.ArgumentError, "data: 5 matrices of 2 ports wanted"),
        (dict(data=networks(20, 2)[:, 0]), ls.ArgumentError, r"data: an array of shape \(20, 2\)"),
        (dict(data=np.full((20, 2, 2), np.nan)), ls.ArgumentError, "data"),
        (dict(frequency=-FREQ), ls.ArgumentError, "freq"),
    ],
)
def test_what_is_not_written(changes, error, message):
    arguments = {"frequency": FREQ, "data": networks(20, 2), **changes}
    with pytest.raises(error, match=message):
        ls.Touchstone(arguments.pop("frequency"), arguments.pop("data"), **arguments).write(io.BytesIO())


# ---- the object -----------------------------------------------------------------------------------------


def test_it_is_its_own():
    s = networks(20, 2)
    file, before = ls.Touchstone(FREQ, s, format="DB"), s.copy()
    s[:] = 0
    assert (file.data == before).all()
    with pytest.raises(ValueError):
        file.data[0, 0, 0] = 1
    with pytest.raises(AttributeError):
        file.format = "RI"
    again = pickle.loads(pickle.dumps(file))
    assert text_of(again) == text_of(file) and repr(again) == repr(file) == "Touchstone(2 ports, 20 frequencies, S, version=1)"


def test_noise_is_counted():
    text = "# GHz S MA R 50\n2 .95 -26 3.57 157 .04 76 .66 -14\n22 .6 -144 1.3 40 .14 40 .56 -85\n4 .7 .64 69 .38\n18 2.7 .46 -33 .4\n"
    file = ls.Touchstone.parse(text)
    assert file.noise_points == 2 and file.frequency.tolist() == [2e9, 22e9]
    assert abs(file.data[0, 1, 0]) == pytest.approx(3.57) and abs(file.data[0, 0, 1]) == pytest.approx(0.04)
    assert pickle.loads(pickle.dumps(file)).noise_points == 2


def test_threads_run_while_a_file_is_read():
    import threading

    file, seen = ls.Touchstone(np.arange(1, 3001) * 1e6, networks(3000, 4)), []
    text = text_of(file)
    threads = [threading.Thread(target=lambda: seen.append(ls.Touchstone.read(io.BytesIO(text), ports=4).data)) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(seen) == 6 and all((data == file.data).all() for data in seen)
