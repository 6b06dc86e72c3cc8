"""Dielectrics and conductors."""

from __future__ import annotations

import functools
from dataclasses import KW_ONLY, dataclass
from typing import Any, Literal, NamedTuple

from . import _arrays, _core
from ._frozen import ROUGHNESS, Frozen, fill, nonzero, number


class Permittivity(NamedTuple):
    """Complex relative permittivity over frequency: complex128 arrays of the shape of the frequencies; im <= 0."""

    through_plane: Any
    in_plane: Any


@dataclass(frozen=True, repr=False)
class Dielectric(Frozen):
    """A laminate, prepreg, mask or resin.

    Parameters
    ----------
    dk : through-plane (data sheet) Dk at f_ref, 1 to 1000
    loss_tangent : at f_ref, 0 to 0.5
    in_plane_ratio : in-plane Dk over through-plane Dk, 0.5 to 2
    f_ref : Hz, 1e5 to 1e11

    Raises `ArgumentError` for a value out of range.

    >>> Dielectric(3.6, 0.004, in_plane_ratio=1.15)
    Dielectric(dk=3.6, loss_tangent=0.004, in_plane_ratio=1.15)
    """

    dk: float
    loss_tangent: float
    _: KW_ONLY
    in_plane_ratio: float = 1.0
    f_ref: float = 1e9

    def __post_init__(self) -> None:
        fill(
            self,
            dk=number("dk", self.dk),
            loss_tangent=number("loss_tangent", self.loss_tangent),
            in_plane_ratio=nonzero("in_plane_ratio", self.in_plane_ratio),
            f_ref=nonzero("f_ref", self.f_ref),
        )
        record = _core.record("dielectric", (self.dk, self.in_plane_ratio, self.loss_tangent, self.f_ref))
        _core.dielectric_check(record)
        fill(self, _record=record)

    def permittivity(self, f: Any) -> Permittivity:
        """Complex relative permittivity at frequencies, causal; time factor exp(+jwt).

        Parameters
        ----------
        f : Hz, 1e3 to 1e12: a number or an array of any shape

        Through (dk, loss_tangent) at f_ref, between 1 kHz and 1 THz; the in-plane value is the through-plane one
        times in_plane_ratio. Source: wideband model of Djordjevic, Biljic, Likar-Smiljanic, Sarkar, IEEE T-EMC
        43(4), 2001. Raises `ArgumentError` with the index of a frequency out of range.

        >>> eps = Dielectric(4.2, 0.02).permittivity(10e9).through_plane
        >>> round(eps.real, 5)
        4.07679
        """
        buffer, shape = _arrays.doubles("f", f)
        result = Permittivity(_arrays.empty(shape, "Z"), _arrays.empty(shape, "Z"))
        _core.permittivity(self._record, buffer, result.through_plane, result.in_plane)
        return result if shape is not None else Permittivity(result.through_plane[0], result.in_plane[0])


@dataclass(frozen=True, repr=False)
class Conductor(Frozen):
    """Copper.

    Parameters
    ----------
    conductivity : S/m, 1e5 to 1e8
    roughness : rms height, m, 0 (smooth) to 20e-6
    roughness_law : "hammerstad": 1 + (2/pi) atan(1.4 (rms/skin depth)^2) times the loss, at most 2 (Hammerstad, Jensen,
        MTT-S 1980). "spheres": fourteen spheres stacked on a smooth surface, at most 8.3 times (Huray et al., DesignCon
        2010, for the stack of Simonovich, 2015): with a measured Rz, roughness = Rz/3.4641

    Raises `ArgumentError` for what is not a number; ranges are checked where it is used.

    >>> Conductor(roughness=4e-7, roughness_law="spheres")
    Conductor(roughness=0.4 um, roughness_law='spheres')
    """

    conductivity: float = 5.8e7
    roughness: float = 0.0
    roughness_law: Literal["hammerstad", "spheres"] = "hammerstad"

    def __post_init__(self) -> None:
        fill(
            self,
            conductivity=nonzero("conductivity", self.conductivity),
            roughness=number("roughness", self.roughness),
        )
        law = ROUGHNESS.code("roughness_law", self.roughness_law)
        fill(self, _record=_core.record("conductor", (self.conductivity, self.roughness, law)))

    def surface_impedance(self, f: Any) -> Any:
        """Impedance of the surface of thick copper, ohm per square, complex: (1 + j)/(conductivity skin depth) K.

        Parameters
        ----------
        f : Hz, 1e3 to 1e12: a number or an array of any shape

        K is complex and causal: its effect on the resistance is the published one of the law, the reactance follows from
        it. Returns complex128 of the shape of f, 0 < re <= im. Raises `ArgumentError` out of range.
        """
        return _arrays.evaluate(functools.partial(_core.surface_impedance, self._record), f, "Z", None)
