"""Arrays in and out. NumPy where it is installed; without it array.array, one-dimensional, and ComplexArray."""

from __future__ import annotations

import functools
from array import array
from typing import Any

from . import _core
from ._errors import ArgumentError
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


def complexes(name: str, values: Any) -> tuple[Any, tuple[int, ...]]:
    """values as a C-contiguous buffer of complex128, and its shape; () for a single number."""
    np = numpy()
    if np is None:
        return _complexes_without_numpy(name, values)
    found = np.asarray(values)
    if found.size and found.dtype.kind not in "fiuc":
        raise TypeError(f"{name}: must be numbers, not {found.dtype}")
    result = np.require(found, np.complex128, ["C_CONTIGUOUS", "ALIGNED"])
    return result, tuple(found.shape)


def _complexes_without_numpy(name: str, values: Any) -> tuple[Any, tuple[int, ...]]:
    try:
        view = memoryview(values)
    except TypeError:
        pass
    else:
        if view.format == "Zd" and view.c_contiguous:
            return view, tuple(view.shape or ())
        values = view.tolist()
    found = array("d")
    return found, _flatten(name, values, found)


def _flatten(name: str, values: Any, to: Any) -> tuple[int, ...]:
    """Appends numbers, or nested sequences of them, as pairs, and returns their shape."""
    if isinstance(values, complex):
        to.extend((values.real, values.imag))
        return ()
    if _is_scalar(values):
        to.extend((_core.number(name, values), 0.0))
        return ()
    shapes = {_flatten(name, value, to) for value in values}
    if len(shapes) > 1:
        raise TypeError(f"{name}: must be a full array: what it holds is not of one shape")
    return (len(values), *(shapes.pop() if shapes else ()))


def networks(name: str, values: Any) -> tuple[Any, tuple[int, ...], int]:
    """Networks as a buffer of complex128, the shape without its last two dimensions, and the number of ports."""
    buffer, shape = complexes(name, values)
    if len(shape) < 2 or shape[-1] != shape[-2] or shape[-1] == 0:
        raise ArgumentError(
            f"{name}: an array of shape {shape}: must be (n, p, p), p ports at n frequencies", _core.E_ARGUMENT, name
        )
    return buffer, shape[:-2], shape[-1]


def repeated(name: str, values: Any, count: int) -> Any:
    """A number for all, or as many as count, as a buffer of count float64."""
    buffer, shape = doubles(name, values)
    if shape is None:
        return array("d", [buffer[0]] * count)
    if shape != (count,):
        text = f"{name}: an array of shape {shape}: must be one number, or {count} of them"
        raise ArgumentError(text, _core.E_ARGUMENT, name)
    return buffer


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
        return _core.complex_array(shape if shape is not None and 1 <= len(shape) <= 3 else _count(shape))
    return array(kind, bytes(_count(shape) * (8 if kind == "d" else 4)))


def evaluate(call: Any, f: Any, kind: str, out: Any, inner: tuple[int, ...] = (), name: str = "f") -> Any:
    """call(f, out) with buffers; returns out, or a new array of the shape of f and inner, or a number for a number."""
    buffer, shape = doubles(name, f)
    if out is not None:
        call(buffer, out)
        return out
    result = empty((shape or ()) + inner if shape is not None or inner else None, kind)
    call(buffer, result)
    return result[0] if shape is None and not inner else result
