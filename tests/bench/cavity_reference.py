"""The cavity model of one via in NumPy and SciPy: ten cavities, closed wall, bare end in air.

The yardstick of the benchmark's cavity rows: annuli in every opening, radial modes of every slab, n >= 1 summed once per
kind of slab as a polynomial in the frequency squared, n = 0 at each frequency, cascade from the far end upwards. It keeps
to the plain grading and to sums without a closed tail; the benchmark checks that both find the same notch.
"""
import numpy as np
from scipy.special import ellipe, ive, kve

C0, MU0 = 299792458.0, 4e-7 * np.pi
EPS0 = 1.0 / (MU0 * C0 * C0)
DRILL, ANTIPAD, WALL, H, T, CAVITIES = 0.25e-3, 0.8e-3, 0.9e-3, 0.2e-3, 17e-6, 10
DK, LOSS, ANNULI, MODES = 3.6, 0.005, 4, 400


def functions(kappa, x):
    """exp-scaled I0, K0 of kappa x; kappa (modes, 1), complex allowed."""
    z = kappa * x
    turn = np.exp(-1j * z.imag) if np.iscomplexobj(z) else 1.0
    return ive(0, z) * turn, kve(0, z)


def second_difference(f):
    return f[..., 1:, 1:] - f[..., 1:, :-1] - f[..., :-1, 1:] + f[..., :-1, :-1]


def reactions(kappa, eps, inner, outer, x):
    """Reactions of the annuli x of one slab, for each mode: (modes, annuli, annuli)."""
    k = np.asarray(kappa).reshape(-1, 1)
    i, kk = functions(k, x)
    ia, ka = functions(k, np.array([inner]))
    ib, kb = functions(k, np.array([outer]))
    e1 = i - ia / ka * kk * np.exp(-2 * k * (x - inner))                 # times exp(kappa x)
    e2 = kk - kb / ib * i * np.exp(-2 * k * (outer - x))                 # times exp(-kappa x)
    d = 1 - ia / ka * kb / ib * np.exp(-2 * k * (outer - inner))
    low = x[:, None] <= x[None, :]
    product = np.where(low, e1[:, :, None] * e2[:, None, :], e2[:, :, None] * e1[:, None, :])
    product = product * np.exp(-k[:, :, None] * np.abs(x[:, None] - x[None, :])) / d[:, :, None]
    f = (eps / k[:, :, None] ** 2) * (np.log(np.minimum(x[:, None], x[None, :])) - product)
    return second_difference(f)


class Slab:
    def __init__(self, h, outer, x, dk=DK, loss=LOSS):
        self.h, self.outer, self.x, self.dk, self.loss = h, outer, x, dk, loss
        self.log = np.log(x[1:] / x[:-1])
        n = np.arange(1, MODES + 1)
        nodes = (2 * np.pi * 60e9 / C0) ** 2 * np.array([0.0, 0.5, 1.0])
        sums = []
        for k2 in nodes:
            kappa = np.sqrt((n * np.pi / h) ** 2 - dk * k2)
            r = 2 * reactions(kappa, dk, DRILL / 2, outer, x)
            sums.append([r[1::2].sum(0), r[0::2].sum(0)])
        self.coef = np.polyfit(nodes, np.array(sums).reshape(3, -1), 2).reshape(3, 2, *r.shape[1:])

    def admittance(self, f):
        """Blocks top/top and top/bottom."""
        w = 2 * np.pi * f
        loss = 1 - 1j * self.loss
        eps = self.dk * loss
        k2 = (w / C0) ** 2 * loss
        even, odd = (self.coef[0] * k2 + self.coef[1]) * k2 + self.coef[2]
        zero = reactions(np.array([1j * np.sqrt(self.dk * k2)]), eps, DRILL / 2, self.outer, self.x)[0]
        factor = 2j * np.pi * w * EPS0 / self.h / np.outer(self.log, self.log)
        return factor * (zero + loss * (even + odd)), factor * (zero + loss * (even - odd))


def half_space(x, log, f):
    a, b = x[:, None], x[None, :]
    j = -2 / np.pi * (a + b) * ellipe(np.minimum(4 * a * b / (a + b) ** 2, 1))
    return 2j * np.pi * 2 * np.pi * f * EPS0 * second_difference(j) / np.outer(log, log)


def compile_via():
    s = np.arange(ANNULI + 1) / ANNULI
    inner = DRILL / 2 + (ANTIPAD - DRILL) / 2 * (1 - (1 - s) ** 2.5)     # graded towards the plane's rim
    return Slab(H, WALL, inner), Slab(T, ANTIPAD / 2, inner), Slab(T, ANTIPAD / 2, inner, 1.0, 0.0)


def zin(via, f):
    cavity, copper, last = via
    blocks = cavity.admittance(f), copper.admittance(f)
    y = half_space(cavity.x, cavity.log, f)
    for k in range(CAVITIES):
        for tt, tb in (blocks[1] if k else last.admittance(f), blocks[0]):
            y = tt - tb @ np.linalg.solve(y + tt, tb)
    share = cavity.log / cavity.log.sum()                                # the coaxial wave of the feed
    return 1 / (share @ y @ share)


def first_notch(via):
    step, low = 0.5e9, 0.5e9
    while zin(via, low + step).imag < 0:
        low += step
    high = low + step
    while high - low > 1e-7 * high:
        middle = 0.5 * (low + high)
        low, high = (middle, high) if zin(via, middle).imag < 0 else (low, middle)
    return 0.5 * (low + high)


if __name__ == "__main__":
    print(first_notch(compile_via()) / 1e9)
