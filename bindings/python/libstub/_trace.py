"""Traces: lines from their cross-section."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

from . import _arrays, _core
from ._frozen import Frozen, fill, instance, nonzero, number
from ._material import Conductor, Dielectric


class TraceLine(NamedTuple):
    """A line over frequency: complex128 arrays of the shape of the frequencies. z: characteristic impedance, ohm. gamma:
    propagation constant, 1/m; re > 0: loss, im > 0: phase."""

    z: Any
    gamma: Any


class Trace(Frozen):
    """What `Microstrip` and `Stripline` share."""

    def line(self, f: Any) -> TraceLine:
        """Characteristic impedance and propagation constant, lossy and dispersive.

        Parameters
        ----------
        f : Hz, 1e3 to 1e12: a number or an array of any shape

        Z = sqrt(Z'/Y') and gamma = sqrt(Z' Y'), with Z' = jw L' + strip and planes, Y' = jw C': causal dielectrics; conductor
        by the rule of incremental inductance (Wheeler 1942) with the surface impedance of `Conductor`, down to the
        direct-current resistance of the strip. Passive and causal, but for a microstrip's dispersion. Gives one
        `RangeWarning` outside the ranges of the class, where the copper is thicker than wide or than a height, above a
        stripline's first waveguide mode, c/(sqrt(Dk)(2 w + pi b/2)), where one Dk is more than twice the other, and where
        a large loss tangent drives a Dk below 1. Raises `ArgumentError` with the index of a frequency out of range.
        """
        buffer, shape = _arrays.doubles("f", f)
        result = TraceLine(_arrays.empty(shape, "Z"), _arrays.empty(shape, "Z"))
        _core.trace_line(self._record, buffer, *result)
        return result if shape is not None else TraceLine(result.z[0], result.gamma[0])

    def _fill(self, kind: int, no_dispersion: bool, height_above: float) -> None:
        values: Any = self
        instance("dielectric_below", values.dielectric_below, Dielectric, "a Dielectric")
        instance("dielectric_above", values.dielectric_above, (Dielectric, type(None)), "a Dielectric or None")
        instance("conductor", values.conductor, (Conductor, type(None)), "a Conductor or None")
        lengths = ("width", "height_below")
        fill(self, thickness=number("thickness", values.thickness), **{n: number(n, getattr(self, n)) for n in lengths})
        record = _core.record(
            "trace",
            (
                kind,
                int(no_dispersion),
                values.width,
                values.thickness,
                values.height_below,
                height_above,
                values.dielectric_below._record,
                values.dielectric_above and values.dielectric_above._record,
                values.conductor and values.conductor._record,
            ),
        )
        _core.trace_check(record)
        fill(self, _record=record)


@dataclass(frozen=True, repr=False, kw_only=True)
class Microstrip(Trace):
    """A trace with one plane, below it; on a board's bottom all is mirrored. Lengths in m.

    Parameters
    ----------
    width : 1e-6 to 0.01
    height_below : from its lower face to the plane, 1e-6 to 0.01
    dielectric_below : `Dielectric` between trace and plane
    thickness : of its copper, 0 to 1e-3; 0: a sheet, and no conductor loss
    dielectric_above : `Dielectric` that fills all above it, of a Dk no greater than below; None: air. A thin mask lies
        between the two
    conductor : `Conductor` of trace and plane; None: smooth, 5.8e7 S/m
    dispersion : with the dispersion of its one mode; else as at low frequency, strictly causal

    Source: Hammerstad, Jensen 1980, with their thickness correction, within 0.3 percent of boundary elements; dispersion:
    Kirschning, Jansen 1982 and 1983, stated within 0.6 percent, for w/h 0.1 to 100, Dk up to 20, h below a tenth of the
    wavelength in what lies above. Raises `ArgumentError` out of range.

    >>> line = Microstrip(width=3e-4, height_below=1.5e-4, dielectric_below=Dielectric(3.6, 0.004), thickness=35e-6)
    >>> round(line.line(1e9).z.real, 1)
    50.6
    """

    width: float
    height_below: float
    dielectric_below: Dielectric
    thickness: float = 0.0
    dielectric_above: Dielectric | None = None
    conductor: Conductor | None = None
    dispersion: bool = True

    def __post_init__(self) -> None:
        instance("dispersion", self.dispersion, bool, "True or False")
        self._fill(_core.TRACE_MICROSTRIP, not self.dispersion, 0.0)


@dataclass(frozen=True, repr=False, kw_only=True)
class Stripline(Trace):
    """A trace with a plane below and a plane above. Lengths in m.

    Parameters
    ----------
    width : 1e-6 to 0.01
    height_below : from its lower face to the plane below, 1e-6 to 0.01
    height_above : from its upper face to the plane above, 1e-6 to 0.01
    dielectric_below : `Dielectric`
    thickness : of its copper, 0 to 1e-3; 0: a sheet, and no conductor loss
    dielectric_above : `Dielectric`; None: as below
    conductor : `Conductor` of trace and planes; None: smooth, 5.8e7 S/m

    Source: exact for a thin strip of one dielectric at any height (Cohn 1954 where centred); thick: Wheeler 1978 for its
    greater width, within 0.2 percent of boundary elements, 0.7 where much nearer to one plane than thick copper likes (0.1
    of the distance). Two dielectrics mix by their share of the energy: within 0.2 percent in Dk for Dk 10 percent apart,
    1 for 50. Raises `ArgumentError` out of range.

    >>> line = Stripline(width=1.13e-4, height_below=1e-4, height_above=1e-4, dielectric_below=Dielectric(3.5, 0.005))
    >>> round(line.line(1e9).z.real, 1)
    50.1
    """

    width: float
    height_below: float
    height_above: float
    dielectric_below: Dielectric
    thickness: float = 0.0
    dielectric_above: Dielectric | None = None
    conductor: Conductor | None = None

    def __post_init__(self) -> None:
        fill(self, height_above=nonzero("height_above", self.height_above))
        self._fill(_core.TRACE_STRIPLINE, False, self.height_above)
