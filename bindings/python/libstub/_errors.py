"""Exceptions and warnings; what the statuses of the library become in Python."""

from __future__ import annotations

import os
import sys
import warnings
from typing import Any

_PACKAGE = os.path.dirname(os.path.abspath(__file__)) + os.sep


class LibstubError(Exception):
    """Base of the exceptions of libstub; ``str()`` is the library's message.

    Attributes
    ----------
    status : int
        The library's status, see `Status`.
    field : str
        The argument or member at fault, ``"drill"``; empty where there is none.
    index : int
        The item that failed, or the line of a file, counted as the message says; -1: no item.
    """

    def __init__(self, message: str, status: int = 0, field: str = "", index: int = -1):
        super().__init__(message)
        self.status = status
        self.field = field
        self.index = index

    def __str__(self) -> str:
        return str(self.args[0]) if self.args else ""

    def __reduce__(self) -> Any:
        return type(self), (str(self), self.status, self.field, self.index)


class ArgumentError(LibstubError, ValueError):
    """A value outside its range, NaN or infinity."""


class GeometryError(LibstubError, ValueError):
    """Values that are fine one by one contradict each other."""


class NoSuchError(LibstubError, LookupError):
    """There is no such thing: no such layer, no stub, no notch."""


class UnsupportedError(LibstubError, ValueError):
    """The chosen fidelity cannot compute this feature."""


class ReadError(LibstubError, OSError):
    """A file cannot be read."""


class WriteError(LibstubError, OSError):
    """A file cannot be written; what stood there before still stands."""


class FormatError(LibstubError, ValueError):
    """A file is not what it should be; the message has the line."""


class BatchError(LibstubError, ValueError):
    """Items of a batch failed for different reasons; the message is that of the first."""


class RangeWarning(UserWarning):
    """Results are there, but outside the stated range of the model. Given once per call, with counts."""


# By the numbers of the header (LSTUB_E_...), which never change; _core cannot be asked here: it imports this module.
_CLASSES: dict[int, type[LibstubError]] = {
    -1: ArgumentError,
    -6: GeometryError,
    -7: NoSuchError,
    -8: UnsupportedError,
    -9: BatchError,
    -10: ReadError,
    -11: WriteError,
    -12: FormatError,
}
_MEMORY = -5


def error_for(status: int, field: str, index: int, message: str) -> Exception:
    """The exception for a failed call; used by the extension module."""
    if status == _MEMORY:
        return MemoryError(message)
    return _CLASSES.get(status, LibstubError)(message, status, field, index)


def warn_range(what: str, count: int, total: int, message: str) -> None:
    """One warning for all items of a call; used by the extension module."""
    if total == 1:
        text = f"{what}: outside the stated range of the model"
    else:
        text = f"{what}: {count} of {total} items are outside the stated range of the model"
    warnings.warn(f"{text}: {message}" if message else text, RangeWarning, stacklevel=_outside())


def _outside() -> int:
    """The stack level of the first caller outside this package, so that the warning shows the user's line."""
    level = 1
    frame = sys._getframe(1)
    while frame.f_back is not None and frame.f_code.co_filename.startswith(_PACKAGE):
        frame = frame.f_back
        level += 1
    return level
