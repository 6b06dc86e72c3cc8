"""Runs the benchmark and prints its table: python3 bench.py BENCH_PROGRAM BOARD WORK_FOLDER [OUT.json].

Every row is measured against a named reference in the same run, in turn, and gives the median and the best of the repeats;
ratios are of medians. Instructions come from callgrind (start-up included, over the units counted), so that a change shows
whatever the machine's noise; without valgrind they are null and a line says so. Before a reference is timed it is checked
that both compute the same, or the notes say how far they are apart.
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
import skrf

import cavity_reference
import media_reference
import reference

VIAS, NOTCHES, POINTS, REPEATS = 100_000, 20_000, 200_000, 5
CAVITY_VIAS, CAVITY_POINTS, NUMPY_POINTS, CAVITY_PLAN = 50, 2_000, 20, 100
SWEEP = np.linspace(0.05e9, 67e9, 2_000)
FILE_POINTS, COUNTED_POINTS = 37_000, 3_700              # about 20 and 2 MB

NOTES = {
    "scikit-rf": "Transition rows against scikit-rf: both share the geometry, Dk and loss, the entry, the line and the return "
                 "vias, and give S on 50 ohm; times include compiling and network construction. scikit-rf computes the circuit: "
                 "closed-form plate capacitances, monopole waves between the plates, no conductor loss, constant Dk. The library "
                 "solves for the field at every opening, multipoles on the vias, barrel and plane loss, causal Dk. 'From a table that "
                 "is there': the making of the table is not within the library's time.",
    "NumPy": "Cavity rows: NumPy as a search needs it, one frequency a call; 'sweep' rows: NumPy vectorised over all of them.",
}


class Bench:
    def __init__(self, program, board, folder):
        self.program, self.board, self.folder, self.rows = program, board, folder, []

    def run(self, *args):
        """Seconds of each repeat, and what the program says on the error output."""
        done = subprocess.run([self.program, *map(str, args)], check=True, capture_output=True, text=True)
        return [float(line) for line in done.stdout.split()], [float(x) for x in done.stderr.split()]

    def seconds(self, *args):
        return self.run(*args)[0][0]

    def instructions(self, units, unit, *args):
        """Of one unit, and its name."""
        if shutil.which("valgrind") is None:
            return None
        command = ["valgrind", "--tool=callgrind", f"--callgrind-out-file={self.folder}/callgrind.out", self.program]
        text = subprocess.run([*command, *map(str, args)], check=True, capture_output=True, text=True).stderr
        return int(re.search(r"Collected : (\d+)", text).group(1)) / units, unit

    def row(self, name, unit, value, against, ours, theirs, counted=None):
        """ours, theirs: seconds of the repeats; value: of seconds, in the unit. theirs None: no reference."""
        ours, theirs = np.atleast_1d(ours), None if theirs is None else np.atleast_1d(theirs)
        median = statistics.median(ours)
        ratio = None if theirs is None else statistics.median(theirs) / median
        best = None if theirs is None else float(theirs.min() / ours.min())
        self.rows.append({"row": name, "value": value(median), "best": value(float(ours.min())), "unit": unit, "against": against,
                          "ratio": ratio, "ratio_of_best": best, "instructions": None if counted is None else counted[0],
                          "instructions_of": None if counted is None else counted[1]})

    def in_turn(self, args, theirs, ours_over=1, theirs_over=1, repeats=REPEATS):
        """Seconds a unit of both, measured one after the other."""
        a, b = [], []
        for _ in range(repeats):
            a.append(self.seconds(*args) / ours_over)
            b.append(timed(theirs) / theirs_over)
        return a, b


def timed(function):
    start = time.perf_counter()
    function()
    return time.perf_counter() - start


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


def closed_form_rows(b):
    against, path = "NumPy, same closed form", os.path.join(b.folder, "plan.txt")
    b.run("plan", VIAS, 1, path)
    table = np.loadtxt(path)
    inputs = (table[:, 0], table[:, 1].astype(int), table[:, 2])
    check_same(table, reference.plan(*inputs))
    both = b.in_turn(("plan", VIAS, 1, path), lambda: reference.plan(*inputs))
    b.row("plan, 100,000 vias of a board", "vias/s", lambda s: VIAS / s, against, *both,
          b.instructions(VIAS // 10, "via", "plan", VIAS // 10, 1, path))
    b.row("plan, 100,000 vias: time", "s", lambda s: s, against, *both)

    exits, rates = inputs[1][:NOTCHES], inputs[2][:NOTCHES]
    antipads = inputs[0][:NOTCHES] + 1e-10 * np.arange(NOTCHES)
    both = b.in_turn(("notch", NOTCHES, 1), lambda: reference.notches(antipads, exits, rates))
    b.row("first notch, no two vias alike", "notches/s", lambda s: NOTCHES / s, against, *both,
          b.instructions(NOTCHES // 10, "via", "notch", NOTCHES // 10, 1))

    freq = 1e8 + 60e9 * np.arange(POINTS) / POINTS
    both = b.in_turn(("zin", POINTS, 1), lambda: reference.zin(freq, 2e-3, 1.6e-10, 1e-14, 4.2e-7))
    b.row("input impedance of a stub", "frequencies/s", lambda s: POINTS / s, against, *both,
          b.instructions(POINTS // 10, "frequency", "zin", POINTS // 10, 1))


def impedance_rows(b, around, words):
    """One frequency of the cavity model; returns the library's seconds."""
    via, micro = cavity_reference.compile_via(around), lambda s: s * 1e6
    freq, re, im = b.run("cavity", CAVITY_POINTS, 1, around)[1]
    apart = abs(cavity_reference.zin(via, freq) / complex(re, im) - 1)
    assert apart < 5e-3, f"{around}: NumPy's cavity model is another one: impedance {apart:.1e} apart"
    grid, sweep = np.linspace(1e9, 60e9, NUMPY_POINTS), np.linspace(1e8, 60e9, CAVITY_POINTS)
    job = ("cavity", CAVITY_POINTS, 1, around)
    counted = b.instructions(CAVITY_POINTS // 10, "frequency", "cavity", CAVITY_POINTS // 10, 1, around)
    ours, theirs = b.in_turn(job, lambda: [cavity_reference.zin(via, f) for f in grid], CAVITY_POINTS, NUMPY_POINTS)
    b.row(f"cavity model: one frequency, {words}", "us", micro, "NumPy and SciPy, same method", ours, theirs, counted)
    both = b.in_turn(job, lambda: cavity_reference.zin(via, sweep), CAVITY_POINTS, CAVITY_POINTS)
    b.row(f"cavity model: sweep, {words}", "us/frequency", micro, "the same, vectorised over frequency", *both, counted)
    return ours


def cavity_rows(b):
    against, milli = "NumPy and SciPy, same method", lambda s: s * 1e3
    via = cavity_reference.compile_via()
    f1 = b.run("first", 1, 1, "wall")[1][0]
    assert abs(cavity_reference.first_notch(via) / f1 - 1) < 2e-3, "NumPy's cavity model is another one"
    both = b.in_turn(("compile", CAVITY_VIAS, 1), cavity_reference.compile_via, CAVITY_VIAS)
    b.row("cavity model, 10 cavities: compile", "ms", milli, against, *both, b.instructions(1, "via", "compile", 1, 1))
    b.row("cavity model, 10 cavities: memory", "KB", lambda s: s / 1024, "-", b.seconds("bytes", 1, 1), None)
    wall = impedance_rows(b, "wall", "closed wall")
    for around, words in (("ring", "4 vias evenly"), ("given4", "4 vias anywhere"), ("given2", "2 vias anywhere")):
        impedance_rows(b, around, words)
    ladder = [b.seconds("ladder", CAVITY_POINTS, 1) / CAVITY_POINTS for _ in range(REPEATS)]
    b.row("ladder: one frequency", "us", lambda s: s * 1e6, "the cavity model here", ladder, wall,
          b.instructions(CAVITY_POINTS // 10, "frequency", "ladder", CAVITY_POINTS // 10, 1))
    both = b.in_turn(("first", CAVITY_VIAS, 1, "wall"),
                     lambda: cavity_reference.first_notch(cavity_reference.compile_via()), CAVITY_VIAS)
    b.row("cavity model: first notch from scratch", "ms", milli, against, *both, b.instructions(1, "via", "first", 1, 1, "wall"))
    for what, words in (("antipad", "other antipads"), ("depth", "drilled, 1 um deeper")):
        notches = b.run("second", 2, 1, what)[1]
        assert 1e-5 < abs(notches[1] / notches[0] - 1) < 1e-2, "the second via is the first one, or another one altogether"
        ours = [b.seconds("second", CAVITY_VIAS, 1, what) / CAVITY_VIAS for _ in range(REPEATS)]
        one, two = b.instructions(1, "via", "second", 1, 1, what), b.instructions(1, "via", "second", 2, 1, what)
        b.row(f"... of a second via, {words}", "ms", milli, "a first one, NumPy and SciPy", ours, both[1],
              None if one is None else (two[0] - one[0], "via"))
    path = os.path.join(b.folder, "plan.txt")
    cavity, loaded = ([b.seconds(job, CAVITY_PLAN, 1, path) for _ in range(3)] for job in ("cavityplan", "plan"))
    b.row("plan with the cavity model, 100 vias", "vias/s", lambda s: CAVITY_PLAN / s, "the loaded barrel here", cavity, loaded,
          b.instructions(10, "via", "cavityplan", 10, 1, path))


def transition_rows(b):
    def entries(s, sign):
        return s[:, 1, 0] if s.shape[1] == 2 else s[:, 2, 0] + sign * s[:, 2, 1]

    n, milli = len(SWEEP), lambda s: s * 1e3
    for what, words, theirs in (
            ("single", "S, 2 ports", lambda: media_reference.single(SWEEP)),
            ("unlike", "S, 2 ports, no cavities alike", lambda: media_reference.single(SWEEP, media_reference.UNLIKE)),
            ("pair", "S, 4 ports, both modes", lambda: media_reference.pair(SWEEP))):
        found = [media_reference.first_minimum(SWEEP, entries(theirs().s, sign)) for sign in (-1, 1)]
        apart = [f / g - 1 for f, g in zip(found, b.run("transition", n, 1, what + ":model")[1])]
        assert max(map(abs, apart)) < 0.15, f"{what}: the circuit is another via: first notch {apart} apart"
        NOTES[f"transition {what}"] = (f"{words}: first notch of the circuit and of the field model differ by "
                                       + " and ".join(f"{100 * a:+.1f} %" for a in apart) + ".")
        against = "scikit-rf, circuit of media"
        ours, circuit = b.in_turn(("transition", n, 1, what + ":model"), theirs)
        b.row(f"{words}, {n:,} frequencies", "ms", milli, against, ours, circuit,
              b.instructions(n // 10, "frequency", "transition", n // 10, 1, what + ":model"))
        ours, circuit = b.in_turn(("transition", n, 1, what + ":table"), theirs)
        b.row("... by a table that is made first", "ms", milli, against, ours, circuit,
              b.instructions(n, "frequency", "transition", n, 1, what + ":table"))
        ours = [b.seconds("transition", n, 1, what + ":read") for _ in range(REPEATS)]
        b.row("... from a table that is there", "ms", milli, against, ours, circuit)


def write_touchstone(path, kind, points):
    """Invented data of 9 digits, 4 ports."""
    freq = 1e7 * (1 + np.arange(points))
    size, angle = np.arange(1, 17) / 20, np.arange(1, 17) * 0.37
    s = size * np.exp(-1j * (angle + freq[:, None] * 1e-12 * (1 + angle)))
    numbers = np.stack([s.real, s.imag] if kind == "RI" else [np.abs(s), np.angle(s, deg=True)], axis=-1).reshape(points, 32)
    line = "%.9g " + "\n".join([" ".join(["% .8e"] * 8)] * 4)
    with open(path, "w", encoding="ascii") as out:
        out.write(f"# HZ S {kind} R 50\n")
        np.savetxt(out, np.column_stack([freq, numbers]), fmt=line)
    return os.path.getsize(path) / 1e6


def touchstone_rows(b):
    for kind in "RI", "MA":
        path, small = (os.path.join(b.folder, f"{name}_{kind}.s4p") for name in ("large", "small"))
        size, counted = write_touchstone(path, kind, FILE_POINTS), write_touchstone(small, kind, COUNTED_POINTS)
        read = skrf.Network(path).s
        points, re, im = b.run("touchstone", path, 1)[1]
        scale = 1e-9 * np.sum(np.abs(read))
        assert points == len(read) and abs(read.real.sum() - re) < scale and abs(read.imag.sum() - im) < scale, "another file"
        both = b.in_turn(("touchstone", path, 1), lambda: skrf.Network(path), repeats=3)
        b.row(f"Touchstone, 4 ports, {kind}, {size:.0f} MB", "MB/s", lambda s: size / s, "scikit-rf's reader", *both,
              b.instructions(round(1e6 * counted), "byte", "touchstone", small, 1))
        os.remove(path)
        os.remove(small)


def board_rows(b):
    with gzip.open(b.board) as file:
        size = sum(len(block) for block in iter(lambda: file.read(1 << 20), b"")) / 1e6
    ours, theirs = [], []
    for _ in range(REPEATS):
        ours.append(b.seconds("read", b.board, 1))
        theirs.append(b.seconds("expat", b.board, 1))
    b.row(f"board reader, {size:.1f} MB unpacked", "MB/s", lambda s: size / s, "expat and zlib alone, one pass", ours, theirs,
          b.instructions(round(1e6 * size), "byte", "read", b.board, 1))


def main():
    b = Bench(*sys.argv[1:4])
    for rows in closed_form_rows, cavity_rows, transition_rows, touchstone_rows, board_rows:
        rows(b)
    print(f"{'row':48} {'median':>10} {'best':>10} {'unit':13} {'ratio':>8}  against; instructions")
    for r in b.rows:
        counted = "-" if r["instructions"] is None else f"{r['instructions']:,.0f}/{r['instructions_of']}"
        ratio = "-" if r["ratio"] is None else f"{r['ratio']:.2f}"
        print(f"{r['row']:48} {r['value']:10.4g} {r['best']:10.4g} {r['unit']:13} {ratio:>8}  {r['against']}; {counted}")
    for note in NOTES.values():
        print(note)
    if shutil.which("valgrind") is None:
        print("valgrind is not installed: instructions were not counted")
    if len(sys.argv) > 4:
        with open(sys.argv[4], "w", encoding="utf-8") as out:
            json.dump({"rows": b.rows, "notes": NOTES, "versions": {"numpy": np.__version__, "scikit-rf": skrf.__version__}}, out,
                      indent=1)
            out.write("\n")


main()
