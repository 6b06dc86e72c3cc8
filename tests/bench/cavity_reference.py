"""The cavity model of one via in NumPy and SciPy: ten cavities, bare end in air, closed wall or return vias.

The yardstick of the benchmark's cavity rows: annuli in every opening, radial modes of every slab, n >= 1 summed once per
kind of slab as a polynomial in the frequency squared, n = 0 at each frequency, cascade from the far end upwards; return vias
as multipoles. It keeps to the plain grading and to sums without a closed tail; the benchmark checks that both find the same
notch. `zin` takes one frequency or many, and is then vectorised over them.
"""
import numpy as np
from scipy.special import ellipe, iv, ive, kv, kve

C0, MU0 = 299792458.0, 4e-7 * np.pi
EPS0 = 1.0 / (MU0 * C0 * C0)
DRILL, ANTIPAD, WALL, H, T, CAVITIES = 0.25e-3, 0.8e-3, 0.9e-3, 0.2e-3, 17e-6, 10
DK, LOSS, ANNULI, MODES, ORDERS = 3.6, 0.005, 4, 400, 2
GIVEN = 1e-3 * np.array([[0.9, 0.1], [-1.0, -0.3], [-0.2, 0.95], [0.3, -0.85]])
AROUND = {"wall": None, "ring": 0.9e-3 * np.array([[1, 0], [0, 1], [-1, 0], [0, -1]]), "given4": GIVEN, "given2": GIVEN[:2]}


def functions(kappa, x):
    """exp-scaled I0, K0 of kappa x; kappa (modes, 1), complex allowed."""
    z = kappa * x
    turn = np.exp(-1j * z.imag) if np.iscomplexobj(z) else 1.0
    return ive(0, z) * turn, kve(0, z)


def second_difference(f):
    return f[..., 1:, 1:] - f[..., 1:, :-1] - f[..., :-1, 1:] + f[..., :-1, :-1]


def echo(kappa, vias):
    """What return vias send back, times I0: multipoles up to ORDERS on each, by Graf's addition theorem."""
    p = np.arange(-ORDERS, ORDERS + 1)
    kappa, m, size = kappa[:, None], len(vias), len(p)
    orders = np.arange(2 * ORDERS + 1)
    step = vias[None, :] - vias[:, None]                                  # from i to j
    far, turn = np.hypot(*step.transpose(2, 0, 1)), step[..., 0] + 1j * step[..., 1]
    pairs = np.triu_indices(m, 1)
    waves = np.zeros((len(kappa), m, m, len(orders)), complex)
    if m > 1:
        found = kv(orders, kappa[:, :, None] * far[pairs][:, None])
        waves[:, pairs[0], pairs[1]] = waves[:, pairs[1], pairs[0]] = found
    phase = np.where(far > 0, turn, 1) / np.where(far > 0, far, 1)
    order = p[:, None] - p[None, :]                                       # source p, order q
    a = waves[:, :, :, np.abs(order)] * phase[:, :, None, None] ** order
    a = (a * (-1.0) ** p).transpose(0, 2, 4, 1, 3).reshape(len(kappa), m * size, m * size)
    rim = kv(np.abs(p), kappa * DRILL / 2) / iv(np.abs(p), kappa * DRILL / 2)
    a[:, np.arange(m * size), np.arange(m * size)] = np.tile(rim, m)
    s, angle = np.hypot(*vias.T), (vias[:, 0] + 1j * vias[:, 1]) / np.hypot(*vias.T)
    there = kv(np.arange(ORDERS + 1), kappa[:, :, None] * s[:, None])[:, :, np.abs(p)]
    sent = -there * (-1.0) ** p * angle[:, None] ** -p
    c = np.linalg.solve(a, sent.reshape(len(kappa), -1, 1))[..., 0]
    return (c * (there * (-angle[:, None]) ** p).reshape(len(kappa), -1)).sum(-1)


def reactions(kappa, eps, inner, outer, x, answer=None):
    """Reactions of the annuli x of one slab, for each mode: (modes, annuli, annuli). outer: of a closed wall, or answer, one
    number a mode, times I0 comes back."""
    k = np.asarray(kappa).reshape(-1, 1)
    i, kk = functions(k, x)
    ia, ka = functions(k, np.array([inner]))
    if answer is None:
        ib, kb = functions(k, np.array([outer]))
        back = kb / ib
    else:
        outer, back = 0.0, -np.reshape(answer, (-1, 1))
    e1 = i - ia / ka * kk * np.exp(-2 * k * (x - inner))                 # times exp(kappa x)
    e2 = kk - back * i * (np.exp(-2 * k * (outer - x)) if np.any(back) else 1.0)     # times exp(-kappa x)
    d = 1 - back * ia / ka * (np.exp(-2 * k * (outer - inner)) if np.any(back) else 1.0)
    low = x[:, None] <= x[None, :]
    product = np.where(low, e1[:, :, None] * e2[:, None, :], e2[:, :, None] * e1[:, None, :])
    product = product * np.exp(-k[:, :, None] * np.abs(x[:, None] - x[None, :])) / d[:, :, None]
    f = (eps / k[:, :, None] ** 2) * (np.log(np.minimum(x[:, None], x[None, :])) - product)
    return second_difference(f)


class Slab:
    """vias: return vias instead of a wall at `outer`."""

    def __init__(self, h, outer, x, dk=DK, loss=LOSS, vias=None):
        self.h, self.outer, self.x, self.dk, self.loss, self.vias = h, outer, x, dk, loss, vias
        self.log = np.log(x[1:] / x[:-1])
        n = np.arange(1, MODES + 1)
        nodes = (2 * np.pi * 60e9 / C0) ** 2 * np.array([0.0, 0.5, 1.0])
        sums = []
        for k2 in nodes:
            kappa = np.sqrt((n * np.pi / h) ** 2 - dk * k2)
            r = 2 * reactions(kappa, dk, DRILL / 2, outer, x, None if vias is None else 0 * kappa)
            sums.append([r[1::2].sum(0), r[0::2].sum(0)])
        self.coef = np.polyfit(nodes, np.array(sums).reshape(3, -1), 2).reshape(3, 2, *r.shape[1:])

    def admittance(self, f):
        """Blocks top/top and top/bottom, (frequencies, annuli, annuli)."""
        w = 2 * np.pi * f
        loss = 1 - 1j * self.loss
        eps = self.dk * loss
        k2 = (w / C0) ** 2 * loss
        kappa = 1j * np.sqrt(self.dk * k2)
        zero = reactions(kappa, eps, DRILL / 2, self.outer, self.x, None if self.vias is None else echo(kappa, self.vias))
        k2 = k2[:, None, None]
        even, odd = (self.coef[0][:, None] * k2 + self.coef[1][:, None]) * k2 + self.coef[2][:, None]
        factor = 2j * np.pi * w[:, None, None] * EPS0 / self.h / np.outer(self.log, self.log)
        return factor * (zero + loss * (even + odd)), factor * (zero + loss * (even - odd))


def half_space(x, log, f):
    a, b = x[:, None], x[None, :]
    j = -2 / np.pi * (a + b) * ellipe(np.minimum(4 * a * b / (a + b) ** 2, 1))
    return 2j * np.pi * 2 * np.pi * f[:, None, None] * EPS0 * second_difference(j) / np.outer(log, log)


def compile_via(around="wall"):
    s = np.arange(ANNULI + 1) / ANNULI
    inner = DRILL / 2 + (ANTIPAD - DRILL) / 2 * (1 - (1 - s) ** 2.5)     # graded towards the plane's rim
    vias = AROUND[around]
    return Slab(H, WALL, inner, vias=vias), Slab(T, ANTIPAD / 2, inner), Slab(T, ANTIPAD / 2, inner, 1.0, 0.0)


def zin(via, freq):
    """At one frequency or, as an array, at many."""
    f = np.atleast_1d(freq)
    cavity, copper, last = via
    blocks = cavity.admittance(f), copper.admittance(f)
    y = half_space(cavity.x, cavity.log, f)
    for k in range(CAVITIES):
        for tt, tb in (blocks[1] if k else last.admittance(f), blocks[0]):
            y = tt - tb @ np.linalg.solve(y + tt, tb)
    share = cavity.log / cavity.log.sum()                                # the coaxial wave of the feed
    z = 1 / np.einsum("i,nij,j->n", share, y, share)
    return z if np.ndim(freq) else z[0]


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
    for way in AROUND:
        print(way, first_notch(compile_via(way)) / 1e9)
