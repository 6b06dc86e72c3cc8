"""Runs the benchmark and prints its table: python3 bench.py BENCH_PROGRAM BOARD WORK_FOLDER [OUT.json].

Every row is measured against a named reference in the same run, in turn, and gives the median of the repeats. Instructions
come from callgrind (one repeat, start-up included), so that a change shows whatever the machine's noise; without valgrind
they are null and a line says so.
"""
import gzip
import json
import os
import re
import shutil
import statistics
import subprocess
import sys
import time

import numpy as np

import cavity_reference
import reference

VIAS, NOTCHES, POINTS, REPEATS = 100_000, 20_000, 200_000, 5
CAVITY_VIAS, CAVITY_POINTS, NUMPY_POINTS, CAVITY_PLAN = 50, 2_000, 20, 100


def run(program, *args):
    out = subprocess.run([program, *map(str, args)], check=True, capture_output=True, text=True).stdout
    return [float(line) for line in out.split()]


def instructions(program, folder, *args):
    if shutil.which("valgrind") is None:
        return None
    command = ["valgrind", "--tool=callgrind", f"--callgrind-out-file={folder}/callgrind.out", program, *map(str, args)]
    text = subprocess.run(command, check=True, capture_output=True, text=True).stderr
    return int(re.search(r"Collected : (\d+)", text).group(1))


def timed(function):
    start = time.perf_counter()
    result = function()
    return time.perf_counter() - start, result


def compare(ours, theirs):
    """Medians of two calls made in turn; each returns seconds."""
    a, b = [], []
    for _ in range(REPEATS):
        a.append(ours())
        b.append(theirs())
    return statistics.median(a), statistics.median(b)


def check_same(table, result):
    """The yardstick computes what the library does, or the ratio would mean nothing."""
    f1, loss, least, most, depths = result
    drilled = table[:, 5] == 3
    assert np.array_equal(drilled, ~np.isnan(least)), f"{(drilled == np.isnan(least)).sum()} vias decided otherwise"
    for name, ours, theirs, tolerance in (("first notch", table[:, 3], f1, 1e-4), ("added loss", table[:, 4], loss, 1e-6),
                                          ("least depth", table[drilled, 6], least[drilled], 1e-4),
                                          ("greatest depth", table[drilled, 7], most[drilled], 1e-6)):
        worst = np.max(np.abs(ours / theirs - 1))
        assert worst < tolerance, f"{name}: NumPy and the library differ by {worst:.1e}"
    return len(depths)


def main():
    program, board, folder = sys.argv[1:4]
    rows = []

    def row(name, value, unit, against, ratio, counted):
        rows.append({"row": name, "value": value, "unit": unit, "against": against, "ratio": ratio, "instructions": counted})

    table_path = os.path.join(folder, "plan.txt")
    run(program, "plan", VIAS, 1, table_path)
    table = np.loadtxt(table_path)
    inputs = (table[:, 0], table[:, 1].astype(int), table[:, 2])
    check_same(table, reference.plan(*inputs))
    ours, theirs = compare(lambda: run(program, "plan", VIAS, 1, table_path)[0], lambda: timed(lambda: reference.plan(*inputs))[0])
    row("plan, 100,000 vias of a board", VIAS / ours, "vias/s", "NumPy, same closed form", theirs / ours,
        instructions(program, folder, "plan", VIAS // 10, 1, table_path))
    row("plan, 100,000 vias: time", ours, "s", "NumPy, same closed form", theirs / ours, None)

    exits = inputs[1][:NOTCHES]
    antipads = inputs[0][:NOTCHES] + 1e-10 * np.arange(NOTCHES)
    rates = inputs[2][:NOTCHES]
    ours, theirs = compare(lambda: run(program, "notch", NOTCHES, 1)[0],
                           lambda: timed(lambda: reference.notches(antipads, exits, rates))[0])
    row("first notch, no two vias alike", NOTCHES / ours, "notches/s", "NumPy, same closed form", theirs / ours,
        instructions(program, folder, "notch", NOTCHES // 10, 1))

    freq = 1e8 + 60e9 * np.arange(POINTS) / POINTS
    ours, theirs = compare(lambda: run(program, "zin", POINTS, 1)[0],
                           lambda: timed(lambda: reference.zin(freq, 2e-3, 1.6e-10, 1e-14, 4.2e-7))[0])
    row("input impedance of a stub", POINTS / ours, "frequencies/s", "NumPy, same closed form", theirs / ours,
        instructions(program, folder, "zin", POINTS // 10, 1))

    via = cavity_reference.compile_via()
    f1 = float(subprocess.run([program, "first", "1", "1"], check=True, capture_output=True, text=True).stderr)
    assert abs(cavity_reference.first_notch(via) / f1 - 1) < 2e-3, "NumPy's cavity model is another one"
    ours, theirs = compare(lambda: run(program, "compile", CAVITY_VIAS, 1)[0] / CAVITY_VIAS,
                           lambda: timed(cavity_reference.compile_via)[0])
    row("cavity model, 10 cavities: compile", ours * 1e3, "ms", "NumPy and SciPy, same method", theirs / ours,
        instructions(program, folder, "compile", 1, 1))
    grid = np.linspace(1e9, 60e9, NUMPY_POINTS)
    ours, theirs = compare(lambda: run(program, "cavity", CAVITY_POINTS, 1)[0] / CAVITY_POINTS,
                           lambda: timed(lambda: [cavity_reference.zin(via, f) for f in grid])[0] / NUMPY_POINTS)
    row("cavity model: one frequency", ours * 1e6, "us", "NumPy and SciPy, same method", theirs / ours,
        instructions(program, folder, "cavity", CAVITY_POINTS // 10, 1))
    ladder, _ = compare(lambda: run(program, "ladder", CAVITY_POINTS, 1)[0] / CAVITY_POINTS, lambda: 0.0)
    row("ladder: one frequency", ladder * 1e6, "us", "the cavity model here", ours / ladder,
        instructions(program, folder, "ladder", CAVITY_POINTS // 10, 1))
    ours, theirs = compare(lambda: run(program, "first", CAVITY_VIAS, 1)[0] / CAVITY_VIAS,
                           lambda: timed(lambda: cavity_reference.first_notch(cavity_reference.compile_via()))[0])
    row("cavity model: first notch from scratch", ours * 1e3, "ms", "NumPy and SciPy, same method", theirs / ours,
        instructions(program, folder, "first", 1, 1))
    cavity = statistics.median(run(program, "cavityplan", CAVITY_PLAN, 1, table_path)[0] for _ in range(3))
    loaded = statistics.median(run(program, "plan", CAVITY_PLAN, 1, table_path)[0] for _ in range(3))
    row("plan with the cavity model, 100 vias", CAVITY_PLAN / cavity, "vias/s", "the loaded barrel here", loaded / cavity, None)

    with gzip.open(board) as file:
        size = sum(len(block) for block in iter(lambda: file.read(1 << 20), b""))
    ours, theirs = compare(lambda: run(program, "read", board, 1)[0], lambda: run(program, "expat", board, 1)[0])
    row(f"board reader, {size / 1e6:.1f} MB unpacked", size / 1e6 / ours, "MB/s", "expat and zlib alone, one pass", theirs / ours,
        instructions(program, folder, "read", board, 1))

    print(f"{'row':40} {'value':>12} {'unit':15} {'ratio':>8}  against; instructions")
    for r in rows:
        counted = "-" if r["instructions"] is None else f"{r['instructions']:,}"
        print(f"{r['row']:40} {r['value']:12.4g} {r['unit']:15} {r['ratio']:8.2f}  {r['against']}; {counted}")
    if shutil.which("valgrind") is None:
        print("valgrind is not installed: instructions were not counted")
    if len(sys.argv) > 4:
        with open(sys.argv[4], "w", encoding="utf-8") as out:
            json.dump(rows, out, indent=1)
            out.write("\n")


main()
