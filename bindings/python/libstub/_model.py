"""The electrical behaviour of one geometry, compiled once."""

from __future__ import annotations

import functools
from dataclasses import dataclass
from typing import Any, Literal

from . import _arrays, _core
from ._errors import ArgumentError
from ._criteria import Criteria, Margin, Signal, SymbolRateLimit, margin_of
from ._frozen import FIDELITY, Frozen, Immutable, fill, instance, nonzero
from ._via import Stub, Via, stubs_of

ALL_STUBS: int = _core.ALL_STUBS

Fidelity = Literal["default", "bulk", "loaded", "ladder", "cavity"]


@functools.lru_cache(maxsize=64)
def _cached_options(fidelity: str, z_ref: float, annuli: int) -> Any:
    return _core.record("options", (FIDELITY.code("fidelity", fidelity), z_ref, annuli))


def options(fidelity: Any, z_ref: Any, annuli: Any = None) -> Any:
    FIDELITY.code("fidelity", fidelity)  # also says that it must be text, where a cache says "unhashable"
    count = 0 if annuli is None else _core.integer("annuli", annuli)
    if annuli is not None and count == 0:  # which would mean the default to the C library
        raise ArgumentError("annuli = 0: must be >= 2 and <= 12", _core.E_ARGUMENT, "annuli")
    return _cached_options(fidelity, nonzero("z_ref", z_ref), count)


@dataclass(frozen=True, repr=False)
class StubLine(Frozen):
    """A stub as a line, at 1 GHz. Of "ladder" and "cavity", which are no lines: as the uniform line of the same first
    notch that holds the same charge.

    fidelity: the one that made these numbers. dk_effective: (c/(4 L f1))^2 of the first notch, end effects included.
    dk_line: c^2 L' C' of the line without its end. impedance: sqrt(L'/C'), ohm. inductance: L', H/m. capacitance: C',
    F/m. end_capacitance: at the open end, F. stated_error: of the first notch, relative: the largest found against
    full-wave data for this fidelity; of "cavity" as `Notch.error`. f_range: top of the stated range, Hz: of "bulk" and
    "loaded" where an antipad radius or a plate spacing is a tenth of the wavelength in the laminate; else 110e9.
    """

    fidelity: str
    dk_effective: float
    dk_line: float
    impedance: float
    inductance: float
    capacitance: float
    end_capacitance: float
    stated_error: float
    f_range: float


@dataclass(frozen=True, repr=False)
class Notch(Frozen):
    """A notch.

    stub: number of the stub that makes it. f: minimum of |S21|, the notch as it is measured, Hz. f_series: zero of
    Im Zin next to it, Hz; NaN where there is none. depth_db: 20 log10 |S21| at f, negative, -300 at least. q: f over
    the width of the notch 3 dB above its floor; NaN where it is not that deep, inf without loss. error: of f,
    relative: "cavity" estimates it for each notch from a second model of fewer annuli; of the others the stated_error
    of the line.
    """

    stub: int
    f: float
    f_series: float
    depth_db: float
    q: float
    error: float

    def __repr__(self) -> str:
        return f"Notch({self.f / 1e9:.4g} GHz, {self.depth_db:.1f} dB, stub={self.stub}, q={self.q:.3g})"


class Model(Immutable):
    """The electrical model of a via, compiled. Immutable; may be used by any number of threads.

    Parameters
    ----------
    via : `Via`. One without any stub compiles, and loads nothing
    fidelity : "cavity": radial modes of every plate pair and copper layer, matched at every opening: as full-wave as a
        round barrel gets. "ladder": for sweeps: every cavity a line section with the radial wave of its plates for
        inductance and a fitted capacitance. "loaded": uniform line, L' from the returns, C' from each cavity's via-plate
        capacitance, planes and pads; capacitance at the open end. "bulk": quarter wave in the laminate's through-plane
        Dk, coaxial impedance. "default": the most accurate one of this version: "cavity"
    z_ref : ohm, line that the stubs load; of a pair: of one of the two
    annuli : of "cavity": annuli an opening is cut into at least, 2 to 12; None: 4

    Stubs are numbered from 0, top one first; `ALL_STUBS` stands for all of them in parallel, the path between them
    neglected. Raises `GeometryError`, `UnsupportedError` where the fidelity cannot compute a feature.
    """

    __slots__ = ("_handle", "_via", "_fidelity", "_z_ref", "_annuli", "__weakref__")
    _handle: Any
    _via: Via
    _fidelity: Fidelity
    _z_ref: float
    _annuli: int | None

    def __init__(self, via: Via, *, fidelity: Fidelity = "default", z_ref: float = 50.0, annuli: int | None = None):
        instance("via", via, Via, "a Via")
        handle = _core.model_create(via.stackup._handle, via._record, options(fidelity, z_ref, annuli))
        fill(self, _handle=handle, _via=via, _fidelity=fidelity, _z_ref=float(z_ref), _annuli=annuli)

    @property
    def via(self) -> Via:
        """The via it was compiled from."""
        return self._via

    @property
    def fidelity(self) -> Fidelity:
        """The fidelity asked for; `StubLine.fidelity` says which one answered."""
        return self._fidelity

    @property
    def z_ref(self) -> float:
        """The line that the stubs load, ohm."""
        return self._z_ref

    @property
    def annuli(self) -> int | None:
        """The annuli asked for; None: the default."""
        return self._annuli

    @property
    def stubs(self) -> list[Stub]:
        """The stub pieces, by number: none, one or two `Stub`."""
        return stubs_of(self._via.stackup, _core.model_stubs(self._handle))

    def line(self, stub: int = 0) -> StubLine:
        """A stub as a line, at 1 GHz; `NoSuchError` where there is no such stub."""
        fidelity, *rest = _core.model_line(self._handle, stub)
        return StubLine(FIDELITY.word(fidelity), *rest)

    @property
    def dk_effective(self) -> float:
        """Effective Dk of the stub that makes the first notch: (c/(4 L f1))^2; `NoSuchError` without a stub."""
        stub = 0
        if len(_core.model_stubs(self._handle)) > 1:
            first = _core.model_notches(self._handle, ALL_STUBS, 1e12, 1)
            stub = first[0][0] if first else 0
        return self.line(stub).dk_effective

    def zin(self, f: Any, *, stub: int = ALL_STUBS, out: Any = None) -> Any:
        """Input impedance of a stub where it hangs on the signal path, ohm, complex.

        Parameters
        ----------
        f : Hz, 1e6 to 1e12, of "ladder" and "cavity" to 200e9: a number, or an array of any shape
        stub : its number, or `ALL_STUBS`
        out : where to write to: a C-contiguous buffer of as many complex128, or of twice as many float64 (re, im
            pairs), apart from f; None: a new array

        Returns complex128 of the shape of f (a complex for a number), or out. Time factor exp(+jwt). Without NumPy a
        `ComplexArray`. Gives one `RangeWarning` for frequencies above f_range of the line. Raises `ArgumentError` with
        the index of a frequency out of range. Source: of "bulk" and "loaded" Zin = Zs coth(gamma L) with the end load,
        Pozar, Microwave Engineering; of the others docs/theory.md. A stub that hangs on a layer without plane is fed
        through a thin plane there of the nearest plane's antipad.
        """
        return _arrays.evaluate(functools.partial(_core.model_zin, self._handle, stub), f, "Z", out)

    def s21(self, f: Any, *, stub: int = ALL_STUBS, out: Any = None) -> Any:
        """Transmission past the stub on a line of z_ref matched at both ends, complex: 2 Zin/(2 Zin + z_ref).

        f, stub, out, result, warnings and errors as `zin`; no unit.
        """
        return _arrays.evaluate(functools.partial(_core.model_s21, self._handle, stub), f, "Z", out)

    def added_loss(self, f: Any, *, stub: int = ALL_STUBS, out: Any = None) -> Any:
        """Loss that the stubs add, dB >= 0: -20 log10 |S21|.

        f, stub, warnings and errors as `zin`. out: a buffer of as many float64 as f. Returns float64 of the
        shape of f (a float for a number; array.array without NumPy), or out.
        """
        return _arrays.evaluate(functools.partial(_core.model_added_loss, self._handle, stub), f, "d", out)

    def notches(self, up_to: float, *, stub: int = ALL_STUBS) -> list[Notch]:
        """All notches from 1e6 Hz up to a frequency (Hz, to 1e12), in rising order.

        Parameters
        ----------
        up_to : Hz
        stub : its number, or `ALL_STUBS`

        Minima of |S21| found by bracketing, not multiples of the first. Empty where there are none. "ladder" and
        "cavity" find none above 200e9. A
        `RangeWarning` where there are notches beyond f_range of the line.
        """
        return [Notch(*values) for values in _core.model_notches(self._handle, stub, up_to, 2**31)]

    def margin(self, signal: Signal, criteria: Criteria) -> Margin:
        """What the criteria say of this via for a signal (`Signal`, `Criteria`): see `Margin`."""
        return margin_of(self._handle, signal, criteria)

    def highest_symbol_rate(self, criteria: Criteria) -> SymbolRateLimit:
        """Highest symbol rate (Bd, up to 1e12) at which the via still meets the criteria; inf if nothing limits."""
        instance("criteria", criteria, Criteria, "a Criteria")
        return SymbolRateLimit.of(_core.highest_symbol_rate(self._handle, criteria._record))

    def __reduce__(self) -> Any:
        return _rebuild_model, (self._via, self._fidelity, self._z_ref, self._annuli)

    def __repr__(self) -> str:
        stubs = ", ".join(map(repr, self.stubs)) or "no stub"
        annuli = "" if self._annuli is None else f", annuli={self._annuli}"
        return f"Model({stubs}; fidelity={self._fidelity!r}, z_ref={self._z_ref:g} ohm{annuli})"


def _rebuild_model(via: Via, fidelity: Fidelity, z_ref: float, annuli: int | None = None) -> Model:
    return Model(via, fidelity=fidelity, z_ref=z_ref, annuli=annuli)
