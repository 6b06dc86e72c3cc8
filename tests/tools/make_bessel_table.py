#!/usr/bin/env python3
"""Writes tests/data/bessel.csv, the table that tests/c/check_bessel.c reads. Needs mpmath.

    make_bessel_table.py > tests/data/bessel.csv
"""
import random

import mpmath as mp

mp.mp.dps = 40


def besselk(n, z):
    """K_n(z); in Hankel's expansion far out, where mpmath's own series needs very many digits."""
    if abs(z) < 1000:
        return mp.besselk(n, z)
    total, term = mp.mpf(1), mp.mpf(1)
    for k in range(1, 200):
        term *= mp.mpf(4 * n * n - (2 * k - 1) ** 2) / (k * 8 * z)
        total += term
        if abs(term) < mp.mpf(10) ** -38 * abs(total):
            return mp.sqrt(mp.pi / (2 * z)) * mp.exp(-z) * total
    raise SystemExit(f"no convergence at {z}")


def besseli(n, z):
    """I_n(z), Re z >= 0; far out by the continuation of K, both exponentials."""
    if abs(z) < 1000:
        return mp.besseli(n, z)
    s = 1 if mp.im(z) >= 0 else -1          # K_n(z e^(-+j pi)) = e^(+-j n pi) K_n(z) +- j pi I_n(z)
    total, term = mp.mpf(1), mp.mpf(1)
    for k in range(1, 200):
        term *= -mp.mpf(4 * n * n - (2 * k - 1) ** 2) / (k * 8 * z)
        total += term
        if abs(term) < mp.mpf(10) ** -38 * abs(total):
            break
    return mp.exp(z) / mp.sqrt(2 * mp.pi * z) * total + s * mp.mpc(0, 1) * (-1) ** n * besselk(n, z) / mp.pi


def besseljy(n, z):
    """J_n, Y_n, H2_n of z, Im z <= 0."""
    h2 = 2 * mp.mpc(0, 1) ** (n + 1) / mp.pi * besselk(n, mp.mpc(0, 1) * z)
    j = mp.mpc(0, 1) ** -n * besseli(n, mp.mpc(0, 1) * z)
    return j, mp.mpc(0, 1) * (h2 - j), h2


def row(function, z, value, scale=None):
    """A line: name, argument, value, and the magnitude that the error is relative to."""
    value = mp.mpmathify(value)
    scale = abs(value) if scale is None else max(abs(value), scale)
    numbers = [(mp.re(z), 18), (mp.im(z), 18), (mp.re(value), 18), (mp.im(value), 18), (scale, 4)]
    print(",".join([function] + [mp.nstr(n, digits, min_fixed=0, max_fixed=0) if n else "0" for n, digits in numbers]))


def real_ik(x):
    x = mp.mpf(x)
    for n in (0, 1):
        i = besseli(n, x) if x < 1000 else mp.re(besseli(n, mp.mpc(x, 0)))
        row(f"i{n}e", x, mp.exp(-x) * i)
        row(f"k{n}e", x, mp.exp(x) * besselk(n, x))


def real_jy(x):
    x = mp.mpf(x)
    for n in (0, 1):
        j, y, h = besseljy(n, mp.mpc(x, 0))
        near = abs(h) if x > 0.5 else None
        row(f"j{n}", x, mp.re(j), near)
        row(f"y{n}", x, mp.re(y), near)


def complex_ik(z):
    i, k = [besseli(n, z) for n in range(5)], [besselk(n, z) for n in range(5)]
    near = mp.hypot(abs(i[0]), abs(i[1])) if abs(z) > 1 and mp.re(z) < 1 else None
    for n in range(5):
        if abs(z) < 1e-50 and n > 1:
            continue                        # beyond the range of a double
        name = f"z%s{n}e"
        row(name % "i", z, mp.exp(-z) * i[n], None if near is None else abs(mp.exp(-z)) * near)
        row(name % "k", z, mp.exp(z) * k[n])
    if abs(mp.re(z)) < 600:
        row("zi0", z, i[0], near)
        row("zk0", z, k[0])


def complex_jy(z):
    for n in (0, 1):
        j, y, h = besseljy(n, z)
        near = mp.hypot(abs(j), abs(y)) if abs(z) > 0.5 and mp.im(z) > -1 else None
        row(f"zj{n}", z, j, near)
        row(f"zy{n}", z, y, near)
        row(f"zh{n}", z, h)


def doubles(values):
    return [float(v) for v in values]


def main():
    draw = random.Random(3)
    print(f"# Values of tests/tools/make_bessel_table.py, mpmath {mp.__version__}, {mp.mp.dps} digits; see there for the rows.")
    print("# e: scaled, exp(-z) I(z) and exp(z) K(z); z...: complex argument; h: Hankel's H^(2); ell: complete elliptic of 1 - m")
    print("# scale: what the error is relative to (the value, or the envelope near zeros of J, Y and I)")
    print("function,re,im,value_re,value_im,scale")
    for x in doubles([1e-300, 1e-100, 1e-20, 1e-8, 1e-3, 0.03, 0.1, 0.3, 0.7, 0.999, 1, 1.001, 1.5, 1.999, 2, 2.001, 3, 3.74, 3.76, 4.99, 5.01, 7,
                      7.99, 8, 8.01, 9, 11.9, 12.1, 15.9, 16.1, 20, 24.9, 25.1, 29.9, 30.1, 50, 123.4, 700, 720, 1e4, 1e8, 1e15]):
        real_ik(x)
    for x in doubles([1e-150, 1e-50, 1e-8, 1e-3, 0.1, 0.5, 0.8936, 1, 1.9, 2, 2.1, 2.404826, 3, 3.831706, 5, 5.520078, 7.9, 8.1, 10, 11.9, 12.1,
                      15, 16.1, 20, 24.9, 25.1, 29.9, 30.1, 50.3, 123.4, 1234.5, 1e4, 99999.5]):
        real_jy(x)
    radii = doubles([1e-150, 1e-30, 1e-6, 0.01, 0.3, 1, 1.95, 2, 2.05, 3, 5, 7.9, 8.1, 11.9, 12.1, 15.9, 16.1, 17.9, 18.1, 20, 24.9, 25.1, 29.9,
                     30.1, 39.9, 40.1, 60, 200, 5e3, 9.99e4])
    for r in radii:
        for angle in (0.0, 1.2, mp.pi / 2, -0.7, -1.56):
            z = mp.mpc(0, r if angle > 0 else -r) if abs(angle) == mp.pi / 2 else mp.mpc(r * float(mp.cos(angle)), r * float(mp.sin(angle)))
            complex_ik(mp.mpc(float(mp.re(z)), float(mp.im(z))))
    for _ in range(30):
        r, angle = 10 ** draw.uniform(-2, 2), draw.uniform(-1.5707, 1.5707)
        complex_ik(mp.mpc(float(r * mp.cos(angle)), float(r * mp.sin(angle))))
    for r in radii[1:-1]:
        for angle in (0.0, -1e-6, -0.01, -1.0):
            if r * mp.sin(-angle) < 600:
                complex_jy(mp.mpc(float(r * mp.cos(angle)), float(r * mp.sin(angle))))
    for m1 in doubles([1, 0.999999, 0.9, 0.5, 0.1, 1e-3, 1e-8, 1e-16, 1e-100, 1e-300]):
        with mp.workdps(340):
            row("ellk", mp.mpf(m1), mp.ellipk(1 - mp.mpf(m1)))
            row("elle", mp.mpf(m1), mp.ellipe(1 - mp.mpf(m1)))


if __name__ == "__main__":
    main()
