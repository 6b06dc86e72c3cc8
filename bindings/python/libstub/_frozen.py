"""What the frozen objects share: checked numbers, words for the header's constants, a repr that tells, pickling."""

from __future__ import annotations

import dataclasses
import enum
import math
import os
from typing import Any, Sequence

from . import _core
from ._errors import ArgumentError

# ---- numbers ------------------------------------------------------------------------------------------


def number(name: str, value: Any) -> float:
    """value as a finite float, or an exception that names it."""
    result = _core.number(name, value)
    if not math.isfinite(result):
        raise ArgumentError(f"{name} = {result}: must be a finite number", _core.E_ARGUMENT, name)
    return result


def nonzero(name: str, value: Any) -> float:
    """The same where 0 would mean "default" to the C library, which in Python is said by leaving it out."""
    result = number(name, value)
    if result == 0.0:
        raise ArgumentError(f"{name} = 0: must be > 0", _core.E_ARGUMENT, name)
    return result


def fill(self: Any, **values: Any) -> None:
    """Sets fields of an object that is frozen, while it is made."""
    for name, value in values.items():
        object.__setattr__(self, name, value)


def instance(name: str, value: Any, cls: type | tuple[type, ...], wanted: str) -> None:
    if not isinstance(value, cls):
        raise TypeError(f"{name}: must be {wanted}, not {type(value).__name__}")


def path_bytes(path: Any) -> bytes:
    if not isinstance(path, (str, os.PathLike)):
        raise TypeError(f"path: must be text or a path, not {type(path).__name__}")
    return os.fsencode(path)


# ---- words --------------------------------------------------------------------------------------------


class Words:
    """Words for constants of the header, both ways."""

    def __init__(self, **codes: int):
        self._code = codes
        self._word = {code: word for word, code in codes.items()}

    def code(self, name: str, word: Any) -> int:
        if not isinstance(word, str):
            raise TypeError(f"{name}: must be {self._choice()}, not {type(word).__name__}")
        if word not in self._code:
            raise ArgumentError(f"{name} = {word!r}: must be {self._choice()}", _core.E_ARGUMENT, name)
        return self._code[word]

    def word(self, code: int) -> str:
        return self._word[code]

    def _choice(self) -> str:
        words = [repr(word) for word in self._code]
        return words[0] if len(words) == 1 else ", ".join(words[:-1]) + " or " + words[-1]


SIDE = Words(top=_core.SIDE_TOP, bottom=_core.SIDE_BOTTOM)
SIDES = Words(top=_core.SIDE_TOP, bottom=_core.SIDE_BOTTOM, both=_core.SIDE_BOTH)
KIND = Words(
    dielectric=_core.LAYER_DIELECTRIC, signal=_core.LAYER_SIGNAL, plane=_core.LAYER_PLANE, mixed=_core.LAYER_MIXED
)
FIDELITY = Words(
    default=_core.FIDELITY_DEFAULT, bulk=_core.FIDELITY_BULK, loaded=_core.FIDELITY_LOADED,
    ladder=_core.FIDELITY_LADDER, cavity=_core.FIDELITY_CAVITY,
)
TOLERANCE = Words(worst=_core.TOLERANCE_WORST, rss=_core.TOLERANCE_RSS)
HOLE = Words(via=_core.HOLE_VIA, pin=_core.HOLE_PIN)
ROUGHNESS = Words(hammerstad=_core.ROUGHNESS_HAMMERSTAD, spheres=_core.ROUGHNESS_SPHERES)
NETWORK = Words(
    S=_core.NETWORK_S, Z=_core.NETWORK_Z, Y=_core.NETWORK_Y, ABCD=_core.NETWORK_ABCD, G=_core.NETWORK_G, H=_core.NETWORK_H
)
FORMAT = Words(RI=_core.FORMAT_RI, MA=_core.FORMAT_MA, DB=_core.FORMAT_DB)
UNIT = Words(Hz=_core.UNIT_HZ, kHz=_core.UNIT_KHZ, MHz=_core.UNIT_MHZ, GHz=_core.UNIT_GHZ)
MATRIX = Words(full=_core.MATRIX_FULL, lower=_core.MATRIX_LOWER, upper=_core.MATRIX_UPPER)
ORDER = Words(**{"21_12": _core.ORDER_21_12, "12_21": _core.ORDER_12_21})
ROW = Words(single=_core.ROW_SINGLE, differential=_core.ROW_DIFFERENTIAL, common=_core.ROW_COMMON)
STUBS = Words(kept=_core.STUBS_KEPT, removed=_core.STUBS_REMOVED)
METAL = Words(lossy=_core.METAL_LOSSY, perfect=_core.METAL_PERFECT)
MODE = Words(single=_core.MODE_SINGLE, odd=_core.MODE_ODD, even=_core.MODE_EVEN)
SEVERITY = Words(note=_core.NOTICE_NOTE, warning=_core.NOTICE_WARNING, refused=_core.NOTICE_REFUSED)


class Status(enum.IntEnum):
    """Statuses of the library: 0 done; above 0 done, with a remark; below 0 nothing was produced."""

    OK = _core.OK
    W_RANGE = _core.W_RANGE
    W_CAPACITY = _core.W_CAPACITY
    E_ARGUMENT = _core.E_ARGUMENT
    E_NULL = _core.E_NULL
    E_SIZE = _core.E_SIZE
    E_NEWER = _core.E_NEWER
    E_MEMORY = _core.E_MEMORY
    E_GEOMETRY = _core.E_GEOMETRY
    E_NONE = _core.E_NONE
    E_UNSUPPORTED = _core.E_UNSUPPORTED
    E_MIXED = _core.E_MIXED
    E_READ = _core.E_READ
    E_WRITE = _core.E_WRITE
    E_FORMAT = _core.E_FORMAT

    def __str__(self) -> str:
        return self.name


# ---- repr ---------------------------------------------------------------------------------------------


def _shortest(value: float, units: Sequence[tuple[str, float]]) -> str:
    """In the unit that says it shortest; in the first one, with four digits, where none says it exactly."""
    texts = []
    for unit, size in units:
        text = f"{value / size:.8g}"
        if "e" not in text and math.isclose(float(text) * size, value, rel_tol=1e-9):
            texts.append(f"{text} {unit}")
    return min(texts, key=len) if texts else f"{value / units[0][1]:.4g} {units[0][0]}"


_UNITS = {
    name: unit
    for unit, names in {
        "m": "thickness tol_plus tol_minus tol_rss_plus tol_rss_minus roughness distance drill pitch depth depth_least "
        "depth_most diameter length stub_length rule_length rule_margin margin depth_tolerance cut_clearance "
        "residual_min residual_target bit_oversize wall_clearance residual residual_least residual_most limit tolerance "
        "x y width height_below height_above left right front back",
        "Hz": "f_ref f_range f f_series f1 nyquist notch_margin f_sigma f_minimum window",
        "Bd": "baud",
        "dB": "added_loss_db loss_margin_db depth_db worst_added_loss_db level_db",
        "ohm": "impedance z_ref",
        "S/m": "conductivity",
        "H/m": "inductance",
        "F/m": "capacitance",
        "F": "end_capacitance",
    }.items()
    for name in names.split()
}  # of members, by name: no name has two units


def show(value: Any, unit: str) -> str:
    """A value of a member as it is read: 0.25 mm, 10 mil, 35 um, 26.56 GHz."""
    if not isinstance(value, float):
        return str(value) if isinstance(value, enum.Enum) else repr(value)
    if not math.isfinite(value) or value == 0.0:
        return f"{value:g} {unit}".rstrip()
    if unit == "m":
        mm, mil, um = ("mm", 1e-3), ("mil", 25.4e-6), ("um", 1e-6)
        return _shortest(value, (um, mm, mil) if abs(value) < 1e-4 else (mm, mil))
    if unit in ("Hz", "Bd"):
        return _shortest(value, ((f"G{unit}", 1e9) if abs(value) >= 1e8 else (f"M{unit}", 1e6),))
    if unit in ("F", "H", "F/m", "H/m"):
        scale, prefix = (1e-15, "f") if unit == "F" else (1e-9, "n") if unit[0] == "H" else (1e-12, "p")
        return f"{value / scale:.4g} {prefix}{unit}"
    return f"{value:.6g} {unit}".rstrip()


def _rebuild(cls: type, values: dict[str, Any]) -> Any:
    return cls(**values)


class Immutable:
    """Base of the objects around a handle: what fill() has set stays."""

    __slots__ = ()

    def __setattr__(self, name: str, value: Any) -> None:
        raise AttributeError(f"a {type(self).__name__} cannot be changed")

    def __delattr__(self, name: str) -> None:
        raise AttributeError(f"a {type(self).__name__} cannot be changed")


class Frozen:
    """Base of the frozen dataclasses: values in, nothing changes afterwards."""

    _record: Any  # the struct of the C library, where it takes one

    def __repr__(self) -> str:
        parts = []
        for item in dataclasses.fields(self):  # type: ignore[arg-type]
            value = getattr(self, item.name)
            if value != item.default or item.default is dataclasses.MISSING:
                parts.append(f"{item.name}={show(value, _UNITS.get(item.name, ''))}")
        return f"{type(self).__name__}({', '.join(parts)})"

    def __reduce__(self) -> Any:
        return _rebuild, (type(self), {item.name: getattr(self, item.name) for item in dataclasses.fields(self)})  # type: ignore[arg-type]
