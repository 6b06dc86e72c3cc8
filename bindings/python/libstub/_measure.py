"""From the lab to the model: notches of measured curves, and what is fitted to them."""

from __future__ import annotations

import enum
from dataclasses import dataclass
from typing import Any, Callable, Iterable, NamedTuple

from . import _arrays, _core
from ._batch import _check_vias
from ._errors import ArgumentError, GeometryError
from ._frozen import Frozen, nonzero
from ._model import Fidelity, options
from ._stackup import Stackup
from ._via import Via


class Quality(enum.IntFlag):
    """What speaks against a measured notch: GOOD, or any of

    SHALLOW: less than 6 dB below the trend. EDGE: the band ends before a flank is back half its depth. RIPPLE: not much more
    than the ripple and noise of the band, score < 8. WIDE: f_sigma > 0.05 f, or wider than 0.6 f: several stubs, or none.
    FLOOR: noise or the window hides the floor: depth is a bound, q NaN.
    """

    GOOD = _core.QUALITY_GOOD
    SHALLOW = _core.QUALITY_SHALLOW
    EDGE = _core.QUALITY_EDGE
    RIPPLE = _core.QUALITY_RIPPLE
    WIDE = _core.QUALITY_WIDE
    FLOOR = _core.QUALITY_FLOOR


@dataclass(frozen=True, repr=False)
class MeasuredNotch(Frozen):
    """A stub notch in a measured curve.

    quality: `Quality`. f, f_sigma: Hz, of the stub alone, trend and window taken out; 1 sigma from noise, ripple, curvature,
    window and trend. depth_db: averaged |S| over the trend where that is least, dB, negative. level_db: averaged |S| as it is
    at f_minimum, dB. f_minimum: Hz, where the averaged |S| itself is least: the channel's slope in it. width: Hz, between the
    flanks at half its depth in dB. q: as `Notch.q`, of the shape fitted. impedance: of the open line with these flanks, over
    that of the channel. score: its rise on both sides over what trend and stubs leave, dB / dB; > 4. window: Hz, as used.
    """

    quality: Quality
    f: float
    f_sigma: float
    depth_db: float
    level_db: float
    f_minimum: float
    width: float
    q: float
    impedance: float
    score: float
    window: float

    def __repr__(self) -> str:
        flags = [flag.name for flag in Quality if flag and flag in self.quality] or ["GOOD"]
        sigma = f"{self.f_sigma / 1e9:.2g}"
        return f"MeasuredNotch({self.f / 1e9:.4g} +- {sigma} GHz, {self.depth_db:.1f} dB, {'|'.join(map(str, flags))})"


class FoundNotches(NamedTuple):
    """Notches of a measured curve, in rising order, and the curves they were found on: averaged_db, trend_db: dB, float64,
    shape (n,), NaN off the band."""

    notches: tuple[MeasuredNotch, ...]
    averaged_db: Any
    trend_db: Any


def find_notches(
    freq: Any,
    s: Any,
    *,
    window: float | None = None,
    f_low: float | None = None,
    f_high: float | None = None,
    depth_least: float | None = None,
) -> FoundNotches:
    """Stub notches in a measured S21 or Sdd21.

    Parameters
    ----------
    freq : Hz, shape (n,), rising, any steps, n >= 16
    s : complex, shape (n,): S21 or Sdd21, as ``s[:, 1, 0]`` of a network
    window : Hz the power is averaged over; None: the median distance of minima of |S| (a period of the ripple), 3 samples to a
        20th of the band, and at most an eighth of the width of the narrowest notch
    f_low, f_high : Hz, band looked at; None: all there is
    depth_least : dB below the trend, 1 to 100; None: 3

    The shape of an open stub, S21 = 2/(2 + z y), is fitted to what the channel's loss a0 + a1 sqrt f + a2 f + a4 f^2 (dB, fitted
    to all but the notches) leaves. A notch has nine samples at least and rises again within the band, with the trend and without
    it. Ripple, roll-off, a noise floor and notches outside the band are none: `FoundNotches.notches` is empty. How and how well:
    docs/theory.md. Raises `ArgumentError`.
    """
    given = (("window", window), ("f_low", f_low), ("f_high", f_high), ("depth_least", depth_least))
    search = _core.record("search", tuple(0.0 if value is None else nonzero(name, value) for name, value in given))
    frequencies, shape = _arrays.doubles("freq", freq)
    values, other = _arrays.complexes("s", s)
    if shape is None or len(shape) != 1 or other != shape:
        text = f"s: an array of shape {other}: must be (n,) for n frequencies, here {shape}"
        raise ArgumentError(text, _core.E_ARGUMENT, "s")
    curves = _arrays.empty(shape, "d"), _arrays.empty(shape, "d")
    found = _core.find_notches(frequencies, values, search, *curves)
    return FoundNotches(tuple(MeasuredNotch(Quality(quality), *rest) for quality, *rest in found), *curves)


class Estimate(NamedTuple):
    """A value and its 1-sigma error."""

    value: float
    sigma: float


def fit_effective_dk(f: float, length: float, *, f_sigma: float = 0.0, length_sigma: float = 0.0, n: int = 1) -> Estimate:
    """Effective Dk of a stub of known length from its null n: (n c/(4 L f))^2.

    Parameters
    ----------
    f, f_sigma : Hz, of the null, and its 1-sigma error
    length, length_sigma : m, of the stub
    n : number of the null, odd: 1, 3, 5 ...

    Errors to first order. Raises `ArgumentError`.

    >>> [round(x, 3) for x in fit_effective_dk(14.75e9, 2.54e-3, f_sigma=0.1e9)]
    [4.002, 0.054]
    """
    return Estimate(*_core.formula("fit_effective_dk", f, f_sigma, length, length_sigma, n))


def fit_length(f: float, dk: float, *, f_sigma: float = 0.0, dk_sigma: float = 0.0, n: int = 1) -> Estimate:
    """Length of a stub of known effective Dk from its null n, m: n c/(4 f sqrt(Dk)).

    Parameters
    ----------
    f, f_sigma : Hz, of the null, and its 1-sigma error
    dk, dk_sigma : effective Dk
    n : number of the null, odd: 1, 3, 5 ...

    Errors to first order. Raises `ArgumentError`.
    """
    return Estimate(*_core.formula("fit_length", f, f_sigma, dk, dk_sigma, n))


@dataclass(frozen=True, repr=False)
class Fit(Frozen):
    """In-plane Dk of a laminate, fitted to coupons.

    describes: False: chi2 is beyond its 99 % quantile: the model does not describe them. dof: coupons less parameters. ratio,
    ratio_sigma: in-plane over through-plane Dk; sigma times sqrt(chi2/dof) where > 1. ratio_low, ratio_high: 95 %, Student t of
    dof (dof 0: normal). offset, offset_sigma: m, by which all stubs are longer; 0 where not asked for. offset_low, offset_high.
    chi2: sum of (residual/f_sigma)^2. residuals: measured less predicted, Hz. stackup: the one with this ratio; None of
    `fit_in_plane_dk`.
    """

    describes: bool
    dof: int
    ratio: float
    ratio_sigma: float
    ratio_low: float
    ratio_high: float
    offset: float
    offset_sigma: float
    offset_low: float
    offset_high: float
    chi2: float
    residuals: tuple[float, ...]
    stackup: Stackup | None = None

    def __repr__(self) -> str:
        offset = f", offset={self.offset * 1e6:.3g} um" if self.offset or self.offset_sigma else ""
        doubt = "" if self.describes else ", does not describe them"
        return f"Fit(ratio={self.ratio:.5g} +- {self.ratio_sigma:.2g}{offset}, chi2={self.chi2:.3g} of {self.dof}{doubt})"

    @staticmethod
    def _of(values: tuple[Any, ...], residuals: Any, stackup: Stackup | None) -> Fit:
        describes, *rest = values
        every: tuple[Any, ...] = (bool(describes), *rest, tuple(float(value) for value in residuals), stackup)
        return Fit(*every)


def _measured(f: Any, f_sigma: Any) -> tuple[Any, Any]:
    frequencies, shape = _arrays.doubles("f", f)
    if shape is None or len(shape) != 1:
        raise ArgumentError(f"f: an array of shape {shape}: must be (n,), one for each coupon", _core.E_ARGUMENT, "f")
    return frequencies, _arrays.repeated("f_sigma", f_sigma, shape[0])


def fit_in_plane_dk(
    predict: Callable[[float, float, int], float], f: Any, f_sigma: Any, *, with_offset: bool = False
) -> Fit:
    """In-plane Dk ratio (0.5 to 2) of a laminate by least squares over coupons, with a model of the caller's.

    Parameters
    ----------
    predict : predict(ratio, offset, coupon) gives the first notch of coupon number coupon (from 0), Hz; offset in m
    f, f_sigma : Hz, > 0, shape (n,): measured first notches and their 1-sigma errors; f_sigma also one for all
    with_offset : fit a common offset of length as well, to 1e-2 m

    What predict raises ends the fit and comes through. Raises `NoSuchError`: no minimum within the limits; `GeometryError`: these
    coupons do not tell ratio and offset apart. `fit_coupons` has the library's own model.

    >>> fit = fit_in_plane_dk(lambda ratio, offset, i: (20e9, 15e9)[i] / ratio**0.5, [19e9, 14.25e9], 1e7)
    >>> round(fit.ratio, 4), fit.dof
    (1.108, 1)
    """
    frequencies, sigmas = _measured(f, f_sigma)
    if not callable(predict):
        raise TypeError(f"predict: must be callable, not {type(predict).__name__}")
    residuals = _arrays.empty((len(frequencies),), "d")
    values = _core.fit_in_plane_dk(predict, frequencies, sigmas, bool(with_offset), residuals)
    return Fit._of(values, residuals, None)


def fit_coupons(
    vias: Iterable[Via],
    f: Any,
    f_sigma: Any,
    *,
    with_offset: bool = False,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
) -> Fit:
    """In-plane Dk ratio of a stackup's dielectrics by least squares over coupons, with the model of this library.

    Parameters
    ----------
    vias : sequence of `Via`, the coupons, all on one stackup
    f, f_sigma : Hz, > 0: their measured first notches and the 1-sigma errors; f_sigma also one for all
    with_offset : fit a common offset of length as well: a stub of length L is a quarter wave of L + offset
    fidelity, z_ref, annuli : as `Model`

    `Fit.stackup` is the stackup with the ratio found. Exceptions as `fit_in_plane_dk`; the GIL is released meanwhile.
    """
    items = _check_vias(vias)
    if not items:
        raise ArgumentError("vias: must hold at least one Via", _core.E_ARGUMENT, "vias")
    stackup = items[0].stackup
    for i, via in enumerate(items):
        if via.stackup is not stackup and via.stackup != stackup:
            raise GeometryError(f"vias[{i}]: is on another stackup", _core.E_GEOMETRY, "vias", i)
    frequencies, sigmas = _measured(f, f_sigma)
    residuals = _arrays.empty((len(frequencies),), "d")
    records = tuple(via._record for via in items)
    values, fitted = _core.fit_coupons(
        stackup._handle, records, options(fidelity, z_ref, annuli), frequencies, sigmas, bool(with_offset), residuals
    )
    return Fit._of(values, residuals, Stackup._of(fitted))
