"""The loaded barrel and the plan of bench.c in NumPy and SciPy, vectorised over all vias: the yardstick of the benchmark.

Same stackup, same closed forms as libstub/model and libstub/plan for this board: bottom stubs, four return vias. It spares
NumPy the search for the least |S21|: its first notch is the zero of the reactance, 1e-4 away.
"""
import numpy as np
from scipy.special import k0e

C0, MU0 = 299792458.0, 4e-7 * np.pi
EPS0 = 1.0 / (MU0 * C0 * C0)
COPPER, T, H = 20, 17e-6, 0.12e-3
DK, RATIO, LOSS = 3.6, 1.15, 0.005
DRILL, PAD = 0.25e-3, 0.5e-3


def wideband(f):
    lam = np.log((1e12 + 1j * f) / (1e3 + 1j * f))
    k = np.log((1e12 + 1e9j) / (1e3 + 1e9j))
    slope = -DK * LOSS / k.imag
    return (DK * (1 + LOSS * k.real / k.imag) + slope * lam) / DK


def to_plane(antipad, height):
    """Barrel to one plane, F, for each antipad."""
    a, b, er = DRILL / 2, antipad / 2, DK * RATIO
    total = np.full_like(antipad, height * height * RATIO / 8)
    for m in range(1, 200000, 2):
        kappa = np.sqrt(1 / RATIO) * m * np.pi / height
        if kappa * (b.min() - a) > 36:
            break
        total -= k0e(kappa * b) / k0e(kappa * a) * np.exp(-kappa * (b - a)) / kappa**2
    return 8 * np.pi * EPS0 * (er / RATIO) / (height * np.log(b / a)) * total


def kind(layer):
    """'d' dielectric, 's' signal, 'p' plane."""
    number = layer // 2
    if layer % 2:
        return "d"
    return "s" if number in (0, COPPER - 1) or number % 3 == 2 else "p"


def capacitances(antipad):
    """F/m of barrel and pad capacitance, each layer in turn: arrays (vias, layers)."""
    n = 2 * COPPER - 1
    planes = [i for i in range(n) if kind(i) == "p"]
    er = DK * RATIO
    per_metre, pads = np.zeros((antipad.size, n)), np.zeros((antipad.size, n))
    thickness = np.where(np.arange(n) % 2 == 0, T, H)

    def wider(height):
        return 2 * np.pi * EPS0 * er * height * (1 / np.log(antipad / PAD) - 1 / np.log(antipad / DRILL))

    regions = [(-1, planes[0])] + list(zip(planes, planes[1:])) + [(planes[-1], n)]
    for above, below in regions:
        height = thickness[above + 1:below].sum()
        if above >= 0 and below < n:
            c = 2 * to_plane(antipad, height) / height
        else:
            c = to_plane(antipad, 2 * height) / height
        per_metre[:, above + 1:below] = c[:, None]
        if below == n:
            pads[:, n - 1] = wider(T)
    for i in planes:
        per_metre[:, i] = 2 * np.pi * EPS0 * er / np.log(antipad / DRILL)
    return per_metre, pads, thickness


def plan(antipad, exit_layer, rate, tolerance=50e-6, clearance=50e-6, ratio=2.0, loss_db=0.3, decide=True):
    """First notch, added loss, and the drill depths (least, most) of every via that fails; NaN where it passes."""
    per_metre, pads, thickness = capacitances(antipad)
    edge = np.concatenate([[0], np.cumsum(thickness)])
    start = edge[exit_layer + 1]
    full = edge[-1] - start
    begin = np.maximum(edge[None, :-1] - start[:, None], 0)
    inside = np.arange(thickness.size)[None, :] > exit_layer[:, None]
    per_metre = np.where(inside, per_metre, 0)
    pads = np.where(inside, pads, 0)
    s, rg = 1e-3, DRILL / 2
    inductance = MU0 / (2 * np.pi) * (np.log(s / (DRILL / 2)) + np.log(s / (4 * rg)) / 4)
    nyquist = rate / 2
    end_full = 4 * EPS0 * PAD / 2 + 4 * EPS0 * DK * (PAD - DRILL) / 2

    def line(length):
        h = np.clip(length[:, None] - begin, 0, thickness)
        padded = length[:, None] >= begin + thickness / 2
        c = (h * per_metre + padded * pads).sum(1) / length
        return c, np.where(length < full, 2 * EPS0 * DRILL, end_full)

    def numbers(length):
        c, ce = line(length)
        f = np.full_like(c, 1e10)
        for _ in range(5):
            cf = c * wideband(f).real / wideband(1e9).real
            q = ce / (cf * length)
            t = np.pi / 2 / (1 + q)
            for _ in range(5):
                t -= (t + np.arctan(q * t) - np.pi / 2) / (1 + q / (1 + (q * t) ** 2))
            f = t / (2 * np.pi * length * np.sqrt(inductance * cf))
        w = 2 * np.pi * nyquist
        cc = c * wideband(nyquist) / wideband(1e9).real
        root = np.sqrt(inductance * cc)
        ys, th = cc / root, np.tanh(1j * w * length * root)
        y = ys * (1j * w * ce + ys * th) / (ys + 1j * w * ce * th)
        return f, -20 * np.log10(np.abs(2 / (2 + 50 * y)))

    def passes(length):
        f, loss = numbers(length)
        return (f >= ratio * nyquist) & (f >= nyquist) & (loss <= loss_db)

    f1, loss = numbers(full)
    if not decide:
        return f1, loss
    fails = ~((f1 >= ratio * nyquist) & (loss <= loss_db))
    good, bad = np.zeros_like(full), full.copy()
    for _ in range(22):
        middle = (good + bad) / 2
        ok = passes(middle)
        good, bad = np.where(ok, middle, good), np.where(ok, bad, middle)
    grow = tolerance + 6e-6 * np.round(full / (H + T))
    low, high = clearance + grow, np.minimum(good, full) - grow
    drilled = fails & (low <= high)
    least, most = np.where(drilled, full - high, np.nan), np.where(drilled, full - low, np.nan)
    depths, last = [], -np.inf
    for lo, hi in sorted(set(zip(least[drilled], most[drilled])), key=lambda p: p[1]):
        if lo > last:
            last = hi
            depths.append(last)
    return f1, loss, least, most, depths


def notches(antipad, exit_layer, rate):
    """First notch of every via and its loss, as `plan` finds them before it decides anything."""
    return plan(antipad, exit_layer, rate, decide=False)


def zin(freq, length, c, ce, inductance):
    w = 2 * np.pi * freq
    cc = c * wideband(freq) / wideband(1e9).real
    root = np.sqrt(inductance * cc)
    ys, th = cc / root, np.tanh(1j * w * length * root)
    return 1 / (ys * (1j * w * ce + ys * th) / (ys + 1j * w * ce * th))
