"""Arrays in and out. NumPy where it is installed; without it array.array and ComplexArray, one-dimensional."""

from __future__ import annotations

import functools
from array import array
from typing import Any

from . import _core
from ._frozen import number


@functools.lru_cache(maxsize=None)
def numpy() -> Any:
    """The numpy module, or None. Imported when the first array is needed, not before."""
    try:
        import numpy as np
    except ImportError:
        return None
    return np


def _is_scalar(values: Any) -> bool:
    if isinstance(values, (int, float, str, bytes)) or values is None:
        return True
    return getattr(values, "shape", None) == () or not hasattr(values, "__len__")


def doubles(name: str, values: Any) -> tuple[Any, tuple[int, ...] | None]:
    """values as a C-contiguous buffer of float64, and its shape; None for a single number."""
    if _is_scalar(values):
        return array("d", [_core.number(name, values)]), None
    np = numpy()
    if np is None:
        return _doubles_without_numpy(name, values)
    found = np.asarray(values)
    if found.size and found.dtype.kind not in "fiu":
        raise TypeError(f"{name}: must be numbers, not {found.dtype}")
    result = np.require(found, np.float64, ["C_CONTIGUOUS", "ALIGNED"])
    return result, result.shape


def _doubles_without_numpy(name: str, values: Any) -> tuple[Any, tuple[int, ...]]:
    try:
        view = memoryview(values)
    except TypeError:
        found = array("d", [number(name, value) for value in values])
        return found, (len(found),)
    if view.ndim != 1:
        raise TypeError(f"{name}: more than one dimension needs NumPy")
    if view.format in ("d", "@d") and view.c_contiguous:
        return view, (len(view),)
    found = array("d", [number(name, value) for value in view.tolist()])
    return found, (len(found),)


def _count(shape: tuple[int, ...] | None) -> int:
    result = 1
    for length in shape or ():
        result *= length
    return result


def empty(shape: tuple[int, ...] | None, kind: str) -> Any:
    """An array to be filled; kind: "d" float64, "Z" complex128, "i" int32."""
    np = numpy()
    if np is not None and shape is not None:
        return np.empty(shape, {"d": np.float64, "Z": np.complex128, "i": np.int32}[kind])
    if kind == "Z":
        return _core.complex_array(_count(shape))
    return array(kind, bytes(_count(shape) * (8 if kind == "d" else 4)))


def evaluate(call: Any, f: Any, kind: str, out: Any) -> Any:
    """call(f, out) with buffers; returns out, or a new array of the shape of f, or a number for a number."""
    buffer, shape = doubles("f", f)
    if out is not None:
        call(buffer, out)
        return out
    result = empty(shape, kind)
    call(buffer, result)
    return result[0] if shape is None else result
