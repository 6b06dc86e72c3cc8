"""Objects shared by threads, and calls that let other threads run."""

import threading
import time
import warnings
from concurrent.futures import ThreadPoolExecutor

import pytest
from conftest import make_via

import libstub as ls

np = pytest.importorskip("numpy")


def test_shared_objects_give_the_same_answers(stackup, model, via, fast, criteria, capability):
    f = np.linspace(1e9, 30e9, 50)
    jobs = [ls.Job(make_via(stackup, antipad=ls.mil(26 + i % 8)), fast, criteria) for i in range(40)]

    def work(_):
        plan = ls.plan(stackup, jobs, capability, fidelity="loaded")
        return (
            model.zin(f).tobytes(), model.added_loss(f).tobytes(), repr(model.notches(up_to=30e9)), repr(via.stubs),
            repr(ls.longest_stub(via, fast, criteria, fidelity="loaded")), repr(list(plan)),
            ls.first_notch_batch([job.via for job in jobs[:4]]).f1.tobytes(), stackup.index("L5"),
        )

    expected = work(0)
    with ThreadPoolExecutor(8) as pool:
        assert all(result == expected for result in pool.map(work, range(40)))


def test_errors_stay_in_their_thread(stackup):
    def work(i):
        with pytest.raises(ls.ArgumentError) as caught:
            ls.quarter_wave_frequency(-1.0 - i, 4.0)
        return str(caught.value).startswith(f"length = {-1 - i} m")

    with ThreadPoolExecutor(8) as pool:
        assert all(pool.map(work, range(400)))


def ticks_while(call):
    """How often this thread gets to run while another one is in call()."""
    worker = threading.Thread(target=call)
    ticks = 0
    worker.start()
    while worker.is_alive():
        time.sleep(0.001)
        ticks += 1
    worker.join()
    return ticks


def test_long_calls_release_the_gil(stackup):
    vias = [make_via(stackup, antipad=ls.mil(26) + i * 1e-9) for i in range(10000)]
    f, model = np.linspace(1e9, 30e9, 3_000_000), make_via(stackup).model(fidelity="loaded")
    out = np.empty(f.shape, complex)
    for call in (lambda: ls.first_notch_batch(vias, fidelity="loaded"), lambda: model.zin(f, out=out)):
        start = time.perf_counter()
        call()
        seconds = time.perf_counter() - start
        assert ticks_while(call) > 20 * seconds  # held throughout: one or two


def test_buffers_are_held_while_they_are_written(via):
    """A bytearray cannot shrink while the library writes into it."""
    import array

    model, f = via.model(fidelity="loaded"), np.linspace(1e9, 30e9, 2_000_000)
    out = array.array("d", bytes(16 * f.size))
    refused = []

    def shrink():
        for _ in range(200):
            try:
                out.append(0.0)
                out.pop()
            except BufferError:
                refused.append(1)
            time.sleep(0.0005)

    worker = threading.Thread(target=shrink)
    worker.start()
    for _ in range(3):
        try:
            model.zin(f, out=out)
        except ValueError:  # met it while it was one longer
            pass
    worker.join()
    assert refused


def test_warnings_in_threads(model):
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        threads = [threading.Thread(target=model.zin, args=([120e9, 1e9],)) for _ in range(8)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
    assert len(caught) == 8 and all("1 of 2 items" in str(w.message) for w in caught)
