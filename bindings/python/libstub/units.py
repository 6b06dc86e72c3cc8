"""Values with a unit to SI, as ``mil(10)`` or ``ghz(28)``; arrays work as well. Divide to go back: ``length / mil(1)``."""

from __future__ import annotations

from typing import Any, TypeVar

from . import _core

__all__ = ["mil", "inch", "mm", "um", "ghz", "mhz", "gbd", "mbd", "gbps", "ps", "ns", "pf", "ff", "nh", "ph"]

_T = TypeVar("_T", bound=Any)


def _scale(value: _T, factor: float, divisor: float) -> _T:
    # One rounding only, so that mil(10) is the double nearest to 0.000254.
    if hasattr(value, "dtype") or hasattr(value, "__array__"):
        return value * factor / divisor  # type: ignore[no-any-return]
    return _core.number("value", value) * factor / divisor  # type: ignore[return-value]


def mil(value: _T) -> _T:
    """Thousandths of an inch in metres.

    >>> mil(10)
    0.000254
    """
    return _scale(value, 254.0, 1e7)


def inch(value: _T) -> _T:
    """Inches in metres."""
    return _scale(value, 254.0, 1e4)


def mm(value: _T) -> _T:
    """Millimetres in metres.

    >>> mm(0.25)
    0.00025
    """
    return _scale(value, 1.0, 1e3)


def um(value: _T) -> _T:
    """Micrometres in metres."""
    return _scale(value, 1.0, 1e6)


def ghz(value: _T) -> _T:
    """Gigahertz in hertz."""
    return _scale(value, 1e9, 1.0)


def mhz(value: _T) -> _T:
    """Megahertz in hertz."""
    return _scale(value, 1e6, 1.0)


def gbd(value: _T) -> _T:
    """Gigabaud in baud (symbols per second)."""
    return _scale(value, 1e9, 1.0)


def mbd(value: _T) -> _T:
    """Megabaud in baud (symbols per second)."""
    return _scale(value, 1e6, 1.0)


def gbps(value: _T) -> _T:
    """Gigabits per second in bits per second."""
    return _scale(value, 1e9, 1.0)


def ps(value: _T) -> _T:
    """Picoseconds in seconds."""
    return _scale(value, 1.0, 1e12)


def ns(value: _T) -> _T:
    """Nanoseconds in seconds."""
    return _scale(value, 1.0, 1e9)


def pf(value: _T) -> _T:
    """Picofarads in farads."""
    return _scale(value, 1.0, 1e12)


def ff(value: _T) -> _T:
    """Femtofarads in farads."""
    return _scale(value, 1.0, 1e15)


def nh(value: _T) -> _T:
    """Nanohenries in henries."""
    return _scale(value, 1.0, 1e9)


def ph(value: _T) -> _T:
    """Picohenries in henries."""
    return _scale(value, 1.0, 1e12)
