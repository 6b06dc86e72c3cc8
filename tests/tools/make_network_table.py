#!/usr/bin/env python3
"""Writes tests/data/networks.csv, the table that tests/c/check_network.c reads. Needs scikit-rf 1.0 or newer and NumPy.

    make_network_table.py > tests/data/networks.csv

A case is some lines `key,number,number...` and ends with its result, `want`. Complex numbers are re, im; matrices row by row.
Every case has one frequency; scikit-rf is given two, where it would take one for something else.
"""
import numpy as np
import skrf as rf
from skrf import network as rfn

RNG = np.random.default_rng(20)
FREQUENCY = rf.Frequency(1, 2, 2, "GHz")


def matrix(p):
    """Entries of all phases; sometimes passive, sometimes not."""
    return RNG.uniform(0.4, 1.6) * (RNG.normal(size=(p, p)) + 1j * RNG.normal(size=(p, p))) / np.sqrt(2 * p)


def line(key, values):
    values = np.asarray(values)
    if np.iscomplexobj(values):
        values = np.stack([values.real, values.imag], axis=-1)
    print(",".join([key] + [repr(float(v)) for v in values.ravel()]))


def case(function, p, *pairs):
    print(f"case,{function},{p}")
    for key, values in pairs:
        line(key, values)


def network(s, z):
    return rf.Network(frequency=FREQUENCY, s=np.array([s, s]), z0=np.array([z, z]))


def renormalise():
    for p in (1, 2, 3, 4, 9, 16):
        s, a, b = matrix(p), RNG.uniform(5, 200, p), RNG.uniform(5, 200, p)
        want = rfn.renormalize_s(s[None], a[None], b[None], s_def="power")[0]
        case("renormalise", p, ("s", s), ("z_from", a), ("z_to", b), ("want", want))
        a, b = (z * (1 + 0.4j * RNG.normal(size=p)) for z in (a, b))
        want = rfn.renormalize_s(s[None], a[None], b[None], s_def="power")[0]
        case("renormalise_complex", p, ("s", s), ("z_from", a), ("z_to", b), ("want", want))


def convert():
    """All kinds of all kinds, through scikit-rf's functions from S."""
    kinds = {1: None, 2: rfn.s2z, 3: rfn.s2y, 4: rfn.s2a, 5: rfn.s2g, 6: rfn.s2h}
    for p in (1, 2, 3, 4, 7):
        s, z = matrix(p), RNG.uniform(20, 120, p)
        all_kinds = {k: s if f is None else f(s[None], z[None])[0] for k, f in kinds.items() if p == 2 or k <= 3}
        for a in all_kinds:
            for b in all_kinds:
                case("convert", p, ("kinds", [a, b]), ("z", z), ("s", all_kinds[a]), ("want", all_kinds[b]))


def join():
    for p in (2, 4, 6, 16):
        a, b, z = matrix(p), matrix(p), RNG.uniform(20, 120, 3 * p // 2)
        x, y = network(a, z[:p]), network(b, z[p // 2:])
        case("cascade", p, ("a", a), ("b", b), ("want", (x ** y).s[0]))
        if p <= 4:
            case("deembed_left", p, ("a", b), ("b", a), ("want", (network(a, [50] * p).inv ** network(b, [50] * p)).s[0]))
            case("deembed_right", p, ("a", b), ("b", a), ("want", (network(b, [50] * p) ** network(a, [50] * p).inv).s[0]))


def shunt():
    for z in (50 + 0j, 1 - 30j, 1e-3 + 2j, 1e5 - 1e6j, 0j):
        for z_ref in (50.0, 42.5):
            media = rf.media.DefinedGammaZ0(FREQUENCY, z0=z_ref)
            stub = network([[(z - z_ref) / (z + z_ref)]], [z_ref])
            case("shunt", 2, ("zin", [z]), ("z", [z_ref]), ("want", media.shunt(stub).s[0]))


def mixed():
    """scikit-rf pairs ports 0 and 1, 2 and 3 ...; others by renumbering first."""
    for p, pairs in ((2, [(0, 1)]), (4, [(0, 1), (2, 3)]), (4, [(0, 2), (1, 3)]), (4, [(3, 1), (0, 2)]), (6, [(0, 1), (2, 3)]),
                     (5, [(4, 1)]), (8, [(0, 2), (1, 3), (4, 6), (7, 5)]), (16, [(2 * i, 2 * i + 1) for i in range(8)])):
        s, z = matrix(p), RNG.uniform(30, 70, p)
        for positive, negative in pairs:
            z[negative] = z[positive]
        order = [port for pair in pairs for port in pair]
        order += [port for port in range(p) if port not in order]
        n = network(s[np.ix_(order, order)], z[order])
        n.se2gmm(len(pairs))
        case("mixed", p, ("s", s), ("z", z), ("pairs", np.array(pairs)), ("z_mixed", n.z0[0].real), ("want", n.s[0]))


def checks():
    for p in (1, 2, 3, 4, 9, 16):
        s = matrix(p)
        case("passivity", p, ("s", s), ("want", [np.linalg.svd(s, compute_uv=False)[0]]))
        if p > 1:
            case("reciprocity", p, ("s", s), ("want", [np.abs(network(s, [50] * p).reciprocity[0]).max()]))
    s = np.diag(np.exp(1j * np.arange(5)))[[3, 1, 0, 4, 2]]
    case("passivity", 5, ("s", s), ("want", [1.0]))


def loss():
    """Fits by NumPy's lstsq in GHz, columns sqrt f, f, f^2 and perhaps 1."""
    f = np.linspace(0.05, 15, 60)
    il = 0.4 + 2 * np.sqrt(f) + 0.7 * f + 0.01 * f * f + 0.5 * np.sin(3 * f) + 0.1 * RNG.normal(size=f.size)
    for low, high, constant, weighted in ((0, 0, 0, 0), (0.05, 7.5, 1, 0), (1, 12, 1, 1), (0.3, 9, 0, 1)):
        k = (f >= low) & (f <= (high or f[-1]))
        x, y = f[k], il[k]
        columns = np.stack([np.sqrt(x), x, x * x] + [np.ones_like(x)] * constant, axis=1)
        w = 10 ** (-y / 20) if weighted else np.ones_like(x)
        a = np.linalg.lstsq(columns * w[:, None], y * w, rcond=None)[0]
        d = y - columns @ a
        fb, tt, fr = 10.3125, 0.024, 7.0
        merit = np.sinc(x / fb) ** 2 / ((1 + (x * tt / 0.2365) ** 4) * (1 + (x / fr) ** 8))
        case("loss", 1, ("freq", f * 1e9), ("loss", il), ("fit", [low * 1e9, high * 1e9, constant, weighted, fb * 1e9, tt * 1e-9, fr * 1e9]),
             ("want", [a[3] if constant else 0.0, a[0] / 1e9 ** 0.5, a[1] / 1e9, a[2] / 1e18, np.sqrt(np.mean(d * d)), np.abs(d).max(),
                       np.sqrt(np.mean(merit * d * d)), x.size]))


def main():
    print(f"# Values of tests/tools/make_network_table.py, scikit-rf {rf.__version__}, NumPy {np.__version__}; see there for the lines.")
    for part in (renormalise, convert, join, shunt, mixed, checks, loss):
        part()


if __name__ == "__main__":
    main()
