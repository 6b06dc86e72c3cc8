"""Published closed forms, for checks, teaching and first estimates."""

from __future__ import annotations

from typing import NamedTuple

from . import _core

__all__ = [
    "quarter_wave_frequency", "quarter_wave_length", "quarter_wave_dk", "delay_dk", "loaded_stub_frequency",
    "notch_floor", "stub_skirt", "rule_of_thumb_length", "Coax", "coax", "return_inductance", "TwinRod", "twin_rod",
    "plate_capacitance", "handbook_capacitance", "handbook_inductance", "skin_depth",
]


def _one(name: str, *arguments: float) -> float:
    result: float = _core.formula(name, *arguments)
    return result


def quarter_wave_frequency(length: float, dk: float, n: int = 1) -> float:
    """Null n of an ideal open stub, in Hz: f = n c/(4 L sqrt(Dk)).

    Parameters
    ----------
    length : stub length, m, > 0
    dk : effective Dk of the barrel (not that of the laminate), >= 1
    n : number of the null, odd: 1, 3, 5 ...

    Valid for a thin barrel with an ideal open end. Source: any transmission-line text, e.g. Pozar, Microwave
    Engineering. Raises `ArgumentError` out of range.

    >>> round(quarter_wave_frequency(100 * 25.4e-6, 4.0) / 1e9, 3)
    14.754
    """
    return _one("quarter_wave_frequency", length, dk, n)


def quarter_wave_length(f: float, dk: float, n: int = 1) -> float:
    """The same solved for the stub length, in m.

    Parameters
    ----------
    f : frequency of null n, Hz, > 0
    dk : effective Dk of the barrel, >= 1
    n : number of the null, odd: 1, 3, 5 ...

    Validity and source as `quarter_wave_frequency`. Raises `ArgumentError` out of range.
    """
    return _one("quarter_wave_length", f, dk, n)


def quarter_wave_dk(f: float, length: float, n: int = 1) -> float:
    """The same solved for the effective Dk.

    Parameters
    ----------
    f : frequency of null n, Hz, > 0
    length : stub length, m, > 0
    n : number of the null, odd: 1, 3, 5 ...

    A result below 1 comes back as it is, with a `RangeWarning`. Validity and source as `quarter_wave_frequency`.
    Raises `ArgumentError` out of range.
    """
    return _one("quarter_wave_dk", f, length, n)


def delay_dk(delay: float) -> float:
    """Dk of a line from its delay: (c delay)^2.

    Parameters
    ----------
    delay : s/m, > 0

    Exact for a TEM line. Raises `ArgumentError` out of range.

    >>> from libstub import inch, ps
    >>> round(delay_dk(ps(190) / inch(1)), 2)
    5.03
    """
    return _one("delay_dk", delay)


def loaded_stub_frequency(length: float, dk: float, zs: float, end_capacitance: float, n: int = 1) -> float:
    """Null n of a stub with a capacitance at its open end, in Hz: root n of cot(2 pi f L sqrt(Dk)/c) = 2 pi f Ce Zs.

    Parameters
    ----------
    length : stub length, m, > 0
    dk : effective Dk of the barrel, >= 1
    zs : impedance of the stub, ohm, > 0
    end_capacitance : F, >= 0
    n : number of the root: 1, 2, 3 ...

    Valid where the stub is a uniform line. Source: open-end correction, Pozar, Microwave Engineering. Raises
    `ArgumentError` out of range.
    """
    return _one("loaded_stub_frequency", length, dk, zs, end_capacitance, n)


def notch_floor(zs: float, z0: float, loss_tangent: float, n: int = 1) -> float:
    """Depth of null n of a stub on a matched line, in dB (negative): 20 log10(2 Zs T/(2 Zs T + Z0)).

    T = tanh(n pi tan d/4): dielectric loss only.

    Parameters
    ----------
    zs : impedance of the stub, ohm, > 0
    z0 : impedance of the line, ohm, > 0
    loss_tangent : of the laminate, > 0
    n : number of the null, odd: 1, 3, 5 ...

    Source: derived from Zin = Zs coth(gamma L). Raises `ArgumentError` out of range.
    """
    return _one("notch_floor", zs, z0, loss_tangent, n)


def stub_skirt(zs: float, z0: float, f_over_f1: float) -> float:
    """Loss of a lossless stub below its first null f1, in dB: 10 log10(1 + (Z0 tan(pi f/2 f1)/(2 Zs))^2).

    Parameters
    ----------
    zs : impedance of the stub, ohm, > 0
    z0 : impedance of the line, ohm, > 0
    f_over_f1 : frequency over that of the null

    Source: derived from Zin = Zs coth(gamma L). Raises `ArgumentError` out of range.
    """
    return _one("stub_skirt", zs, z0, f_over_f1)


def rule_of_thumb_length(bit_rate: float) -> float:
    """Longest stub by the rule of thumb 0.3 inch Gb/s over the bit rate, in m: for comparison only.

    Parameters
    ----------
    bit_rate : b/s, > 0

    Source: E. Bogatin, rule of thumb 18, EDN Asia, 19 Jan 2015. Raises `ArgumentError` out of range.
    """
    return _one("rule_of_thumb_length", bit_rate)


class Coax(NamedTuple):
    """Coaxial line: capacitance (F/m), inductance (H/m), impedance (ohm)."""

    capacitance: float
    inductance: float
    impedance: float


def coax(inner_diameter: float, outer_diameter: float, dk: float) -> Coax:
    """Coaxial line of a barrel in an antipad: C' = 2 pi eps0 Dk/ln(b/a), L' = (mu0/2 pi) ln(b/a).

    Parameters
    ----------
    inner_diameter, outer_diameter : m, > 0, the outer one the larger
    dk : >= 1

    Exact for the line. Source: textbook. Raises `ArgumentError` or `GeometryError`.
    """
    return Coax(*_core.formula("coax", inner_diameter, outer_diameter, dk))


def return_inductance(drill: float, count: int, distance: float, return_drill: float) -> float:
    """Loop inductance of a barrel with return vias on a circle, in H/m: (mu0/2 pi)[ln(s/a) + (1/M) ln(s/(M r_g))].

    Parameters
    ----------
    drill : barrel diameter, m, > 0
    count : number M of return vias
    distance : radius s of the circle, m
    return_drill : diameter of the return vias, m, > 0

    Valid for thin barrels; M = 1 is the two-wire line with s >> a. Refused where the return vias would touch each
    other or the barrel. Source: derived from the potential of parallel wires. Raises `ArgumentError` or
    `GeometryError`.
    """
    return _one("return_inductance", drill, count, distance, return_drill)


class TwinRod(NamedTuple):
    """Two equal barrels: odd-mode inductance of one (H/m), differential impedance (ohm)."""

    odd_inductance: float
    differential_impedance: float


def twin_rod(drill: float, pitch: float, dk: float) -> TwinRod:
    """Two equal barrels without planes: (mu0/2 pi) acosh(s/d) and (eta0/(pi sqrt(Dk))) acosh(s/d).

    Parameters
    ----------
    drill : barrel diameter d, m, > 0
    pitch : axis to axis s, m, > drill
    dk : >= 1

    Exact for the two-wire line. Source: textbook. Raises `ArgumentError` or `GeometryError`.
    """
    return TwinRod(*_core.formula("twin_rod", drill, pitch, dk))


def plate_capacitance(drill: float, antipad: float, spacing: float, dk_through_plane: float, dk_in_plane: float) -> float:
    """Capacitance between a barrel and one plane of an infinite plate pair, in F, static.

    Parameters
    ----------
    drill : barrel diameter, m, > 0
    antipad : antipad diameter, m, > drill
    spacing : between the planes, m, > 0
    dk_through_plane, dk_in_plane : >= 1

    The sum over odd modes of 8 pi eps (1 - K0(k b)/K0(k a))/(h ln(b/a) k^2), good to 1e-6 of that sum; the TEM field
    assumed in the antipad costs up to a few percent. Source: Zhang, Fan, Selli, Cocchini, de Paulis, IEEE T-MTT
    56(9), 2008. Raises `ArgumentError` or `GeometryError`.
    """
    return _one("plate_capacitance", drill, antipad, spacing, dk_through_plane, dk_in_plane)


def handbook_capacitance(thickness: float, pad: float, antipad: float, dk: float) -> float:
    """Capacitance of a whole via, handbook form, in F: 1.41 Dk T D1/(D2 - D1) with inches and pF, here in SI.

    Parameters
    ----------
    thickness : of the board, m, > 0
    pad, antipad : diameters, m, the antipad the larger
    dk : >= 1

    Good to 50 percent. Source: Johnson, Graham, High-Speed Digital Design, 1993, ch. 7 (from memory). Raises
    `ArgumentError` or `GeometryError`.
    """
    return _one("handbook_capacitance", thickness, pad, antipad, dk)


def handbook_inductance(length: float, diameter: float) -> float:
    """Inductance of a whole via, handbook form, in H: 5.08 h (ln(4h/d) + 1) with inches and nH, here in SI.

    Parameters
    ----------
    length : of the barrel, m, > 0
    diameter : of the barrel, m, > 0

    Good to 50 percent; the return path is left out. Source: Johnson, Graham, High-Speed Digital Design, 1993, ch. 7
    (from memory). Raises `ArgumentError` out of range.
    """
    return _one("handbook_inductance", length, diameter)


def skin_depth(conductivity: float, f: float) -> float:
    """Skin depth, in m: sqrt(1/(pi f mu0 conductivity)).

    Parameters
    ----------
    conductivity : S/m, 1e5 to 1e8
    f : Hz, 1e3 to 1e12

    Textbook. Raises `ArgumentError` out of range.

    >>> round(skin_depth(5.8e7, 1e9) * 1e6, 3)
    2.09
    """
    return _one("skin_depth", conductivity, f)
