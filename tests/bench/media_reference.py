"""The via of bench_network.c as a circuit of scikit-rf networks: the physics-based via model as its users write it.

Every cavity is a shunt via-plate capacitance, the series impedance of the radial line between its planes, and the
capacitance again; every plane is a short coaxial line. The trace splits its cavity and takes a share of the radial wave. Closed
forms and monopoles throughout: a circuit, where the library solves for the field at every opening. All functions of
frequency are arrays. Cavities that are alike are made once, radial impedances once for all heights, and the pair shares
what its two modes have in common.
"""
import numpy as np
import skrf
from scipy.special import hankel2, k0e
from skrf.media import DefinedGammaZ0

C0, MU0 = 299792458.0, 4e-7 * np.pi
EPS0 = 1.0 / (MU0 * C0 * C0)
A, R, T = 0.125e-3, 0.35e-3, 17e-6
DK, LOSS, Z0, LINE = 3.6, 0.005, 50.0, 2e-3 - A
ALIKE = [0.2e-3] * 10
UNLIKE = [0.2e-3 + 4e-6 * (i - 4) for i in range(10)]    # no two cavities alike, the fifth as above
SPLIT = 4                                                # the cavity that the trace leaves in
RING = 0.9e-3 * np.array([[1, 0], [0, 1], [-1, 0], [0, -1]])
PITCH = 0.9e-3
AROUND_PAIR = 0.9e-3 * np.array([[0, 1], [0, -1], [-1, 0], [1, 1], [1, -1], [2, 0]])


def plate_capacitance(h):
    """Of a barrel to one plane of the pair: Zhang, Fan, Selli, Cocchini, de Paulis, IEEE T-MTT 56(9), 2008, static."""
    k = np.arange(1, 400, 2) * np.pi / h
    terms = (1 - k0e(k * R) / k0e(k * A) * np.exp(-k * (R - A))) / k**2
    tail = np.pi**2 / 8 - np.sum(1 / np.arange(1, 400, 2)**2)
    return 8 * np.pi * EPS0 * DK / (h * np.log(R / A)) * (terms.sum() + tail * (h / np.pi)**2)


def radial_impedance(w, k, barrels, vias):
    """Impedances between the barrels per metre of height, (n, barrels, barrels), vias shorted. Equal distances once."""
    at = np.vstack([barrels, vias])
    distance = np.hypot(*(at[:, None] - at[None, :]).transpose(2, 0, 1))
    values, place = np.unique(np.round(distance, 9), return_inverse=True)
    z = (w * MU0 / 4)[:, None] * hankel2(0, k[:, None] * np.where(values > 0, values, A))
    z[:, 0] /= -0.5j * np.pi * k * A * hankel2(1, k * A)                         # the barrel's own rim
    z = z[:, place.reshape(distance.shape)]
    b = len(barrels)
    return z[:, :b, :b] - z[:, :b, b:] @ np.linalg.solve(z[:, b:, b:], z[:, b:, :b])


class Parts:
    """What both modes of a pair have in common."""

    def __init__(self, freq):
        frequency = skrf.Frequency.from_f(freq, unit="hz")
        self.k = 2 * np.pi * freq / C0 * np.sqrt(DK * (1 - 1j * LOSS))
        index = np.sqrt(DK * (1 - 1j * LOSS))
        self.media = DefinedGammaZ0(frequency, z0=Z0, gamma=1j * self.k)
        plane = DefinedGammaZ0(frequency, z0_port=Z0, z0=60 * np.log(R / A) / index, gamma=1j * self.k)
        self.plane = plane.line(T, "m")
        self.end = self.media.shunt_capacitor(4 * EPS0 * A) ** self.media.open()
        self.line = self.media.line(LINE, "m")

        self.made = {}

    def shunt(self, h):
        if h not in self.made:
            self.made[h] = self.media.shunt_capacitor(plate_capacitance(h) * (1 - 1j * LOSS))
        return self.made[h]

    def via(self, heights, zpp):
        """From entry to line; zpp: per metre of height."""
        media, cells = self.media, {}

        def cell(h):
            if h not in cells:
                cells[h] = self.shunt(h) ** media.resistor(zpp * h) ** self.shunt(h) ** self.plane
            return cells[h]

        h = heights[SPLIT]
        half, stub, path = media.resistor(zpp * h / 2), self.end, cell(heights[0])
        for below in reversed(heights[SPLIT + 1:]):
            stub = cell(below) ** stub
        for above in heights[1:SPLIT]:
            path = path ** cell(above)
        stub = half ** self.shunt(h) ** self.plane ** stub
        return path ** self.shunt(h) ** half ** media.shunt(stub) ** media.resistor(-zpp * h / 4) ** self.line


def single(freq, heights=ALIKE):
    """2-port S."""
    parts = Parts(freq)
    z = radial_impedance(2 * np.pi * freq, parts.k, np.zeros((1, 2)), RING)
    return parts.via(heights, z[:, 0, 0])


def pair(freq, heights=ALIKE):
    """4-port S: both modes, and from them the ports one by one. Order: entries of both barrels, then their traces."""
    parts = Parts(freq)
    z = radial_impedance(2 * np.pi * freq, parts.k, np.array([[0, 0], [PITCH, 0]]), AROUND_PAIR)
    odd, even = (parts.via(heights, z[:, 0, 0] + sign * z[:, 0, 1]) for sign in (-1, 1))
    s = np.zeros((len(freq), 4, 4), complex)
    s[:, :2, :2], s[:, 2:, 2:] = odd.s, even.s
    network = skrf.Network(frequency=parts.media.frequency, s=s, z0=[2 * Z0, 2 * Z0, Z0 / 2, Z0 / 2])
    network.gmm2se(p=2)
    return network


def first_minimum(freq, s):
    """Hz, as bench_network.c finds it."""
    size = np.abs(s)
    return freq[1:-1][(size[1:-1] < size[:-2]) & (size[1:-1] < size[2:]) & (size[1:-1] < 0.7)][0]
