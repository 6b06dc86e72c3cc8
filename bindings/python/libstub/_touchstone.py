"""Touchstone files, read and written."""

from __future__ import annotations

import os
from typing import Any, Iterable, Literal, NamedTuple, Sequence, Union

from . import _arrays, _core
from ._frozen import FORMAT, MATRIX, NETWORK, ORDER, ROW, UNIT, Immutable, fill, instance, path_bytes

Path = Union[str, "os.PathLike[str]"]
Parameter = Literal["S", "Z", "Y", "G", "H"]
Format = Literal["RI", "MA", "DB"]
Unit = Literal["Hz", "kHz", "MHz", "GHz"]
Matrix = Literal["full", "lower", "upper"]
Order = Literal["21_12", "12_21"]


class TouchstoneRow(NamedTuple):
    """What a row, and the column of its number, of a mixed-mode matrix is. kind: "single", "differential" or "common". port,
    partner: from 0; differential: port is the positive one; single: partner is None."""

    kind: Literal["single", "differential", "common"]
    port: int
    partner: int | None = None


def _row(values: tuple[int, int, int]) -> TouchstoneRow:
    kind, port, partner = values
    return TouchstoneRow(ROW.word(kind), port, partner if partner >= 0 else None)  # type: ignore[arg-type]


def _row_codes(i: int, row: Any) -> tuple[int, int, int]:
    kind, port, partner = row
    name = f"rows[{i}]"
    return ROW.code(name, kind), _core.integer(name, port), -1 if partner is None else _core.integer(name, partner)


class Touchstone(Immutable):
    """What a Touchstone file holds: read from one, or made to be written. Immutable.

    Parameters
    ----------
    frequency : Hz, shape (n,), >= 0, rising
    data : complex, shape (n, p, p), p up to 16, row: port the wave comes out of, column: port driven; in ohm, siemens or
        without unit, not normalised to the reference
    reference : ohm, > 0: one, or one for each port, in a mode or not
    parameter : "S", "Z", "Y"; of two ports also "G", "H"
    version : 1 or 2
    format : "RI": real and imaginary part; "MA": magnitude and angle in degrees; "DB": 20 log10 of the magnitude, and angle
    unit : of the frequencies in the text: "Hz", "kHz", "MHz" or "GHz"
    matrix : "full", "lower", "upper": the entries in the text; all but "full" need version 2
    order : of two ports: "21_12" or "12_21" (version 2)
    digits : significant digits, 1 to 17; None: as few as give the same double back
    rows : a `TouchstoneRow` for each row of mixed-mode data (version 2); None: row i is port i
    comments : lines of the head, without the leading "!"

    ``skrf.Network(f=t.frequency, f_unit="hz", s=t.data, z0=t.reference)`` makes a scikit-rf network of one. Ranges are checked
    where it is written.

    >>> import io
    >>> file = io.BytesIO()
    >>> Touchstone([1e9], [[[0.25j]]], unit="GHz").write(file)
    >>> Touchstone.parse(file.getvalue()).data.tolist()
    [[[0.25j]]]
    """

    __slots__ = (
        "frequency", "data", "reference", "parameter", "version", "format", "unit", "matrix", "order", "digits", "rows", "comments",
        "noise_points", "__weakref__",
    )
    frequency: Any
    data: Any
    reference: tuple[float, ...]
    parameter: Parameter
    version: int
    format: Format
    unit: Unit
    matrix: Matrix
    order: Order
    digits: int | None
    rows: tuple[TouchstoneRow, ...] | None
    comments: tuple[str, ...]
    noise_points: int

    def __init__(
        self,
        frequency: Any,
        data: Any,
        *,
        reference: Any = 50.0,
        parameter: Parameter = "S",
        version: int = 1,
        format: Format = "RI",
        unit: Unit = "Hz",
        matrix: Matrix = "full",
        order: Order = "21_12",
        digits: int | None = None,
        rows: Sequence[TouchstoneRow] | None = None,
        comments: Iterable[str] = (),
    ):
        NETWORK.code("parameter", parameter)
        FORMAT.code("format", format)
        UNIT.code("unit", unit)
        MATRIX.code("matrix", matrix)
        ORDER.code("order", order)
        if isinstance(comments, str):
            raise TypeError("comments: must be a sequence of texts, not str")
        lines = tuple(comments)
        for i, line in enumerate(lines):
            instance(f"comments[{i}]", line, str, "text")
        f, _ = _arrays.doubles("frequency", frequency)
        s, _, ports = _arrays.networks("data", data)
        fill(
            self,
            frequency=_kept(f, frequency),
            data=_kept(s, data),
            reference=tuple(_arrays.repeated("reference", reference, ports)),
            parameter=parameter,
            version=_core.integer("version", version),
            format=format,
            unit=unit,
            matrix=matrix,
            order=order,
            digits=None if digits is None else _core.integer("digits", digits),
            rows=None if rows is None else tuple(_row(_row_codes(i, row)) for i, row in enumerate(rows)),
            comments=lines,
            noise_points=0,
        )

    @classmethod
    def load(cls, path: Path, *, ports: int | None = None) -> Touchstone:
        """The contents of a file of Touchstone 1.0, 1.1, 2.0 or 2.1.

        Parameters
        ----------
        path : of the file
        ports : of a file of version 1, which does not say; None: from a name that ends in .sNp, else from the lines

        Numbers are read correctly rounded, noise data counted only, comments kept from the head. What the standard forbids is
        refused: `FormatError`, "line 12, column 7: ..."; `ReadError` where it cannot be read. A compressed file is
        opened by the caller: ``Touchstone.read(gzip.open(path), ports=4)``.
        """
        return cls._of(_core.touchstone_load(path_bytes(path), _ports(ports)))

    @classmethod
    def parse(cls, text: bytes | str, *, ports: int | None = None) -> Touchstone:
        """The same of the text of a file; ports and errors as `load`."""
        return cls._of(_core.touchstone_parse(text.encode() if isinstance(text, str) else text, _ports(ports)))

    @classmethod
    def read(cls, file: Any, *, ports: int | None = None) -> Touchstone:
        """The same of a file object opened in binary mode, from where it stands to its end, piece by piece.

        Parameters
        ----------
        file : with a method read(size) that gives bytes; what it raises comes through
        ports : as `load`; a file object has no name that could tell
        """
        return cls._of(_core.touchstone_read(file.read, _ports(ports)))

    @classmethod
    def _of(cls, handle: Any) -> Touchstone:
        numbers, points, noise, reference, rows, comments = _core.touchstone_get(handle)
        version, ports, parameter, format_, unit, matrix, order = numbers
        frequency, data = _arrays.empty((points,), "d"), _arrays.empty((points, ports, ports), "Z")
        _core.touchstone_copy(handle, frequency, data)
        self = object.__new__(cls)
        fill(
            self,
            frequency=_frozen(frequency),
            data=_frozen(data),
            reference=reference,
            parameter=NETWORK.word(parameter),
            version=version,
            format=FORMAT.word(format_),
            unit=UNIT.word(unit),
            matrix=MATRIX.word(matrix),
            order=ORDER.word(order),
            digits=None,
            rows=None if rows is None else tuple(_row(row) for row in rows),
            comments=comments,
            noise_points=noise,
        )
        return self

    @property
    def ports(self) -> int:
        """Number of ports, or of modes."""
        return len(self.reference)

    def save(self, path: Path) -> None:
        """Writes a file of Touchstone 1.1 or 2.0 to a path. It appears whole or not at all: `WriteError` leaves what was there."""
        _core.touchstone_save(self._values(), path_bytes(path))

    def write(self, file: Any) -> None:
        """Writes to a file object opened in binary mode, piece by piece.

        Parameters
        ----------
        file : with a method write(bytes); what it raises comes through
        """
        _core.touchstone_write(self._values(), file.write)

    def _values(self) -> tuple[Any, ...]:
        numbers = (
            self.version, self.ports, NETWORK.code("parameter", self.parameter), FORMAT.code("format", self.format),
            UNIT.code("unit", self.unit), MATRIX.code("matrix", self.matrix), ORDER.code("order", self.order), self.digits or 0,
        )
        rows = None if self.rows is None else tuple(_row_codes(i, row) for i, row in enumerate(self.rows))
        reference = _arrays.doubles("reference", self.reference)[0]
        return numbers, self.frequency, self.data, reference, rows, self.comments

    def __reduce__(self) -> Any:
        return _rebuild, ({name: getattr(self, name) for name in self.__slots__ if name != "__weakref__"},)

    def __repr__(self) -> str:
        return f"Touchstone({self.ports} ports, {len(self.frequency)} frequencies, {self.parameter}, version={self.version})"


def _ports(ports: Any) -> int:
    return 0 if ports is None else _core.integer("ports", ports)


def _kept(buffer: Any, given: Any) -> Any:
    """The buffer of an argument as an array of our own."""
    np = _arrays.numpy()
    return buffer if np is None else _frozen(np.array(buffer))


def _frozen(array: Any) -> Any:
    if _arrays.numpy() is not None:
        array.flags.writeable = False
    return array


def _rebuild(values: dict[str, Any]) -> Touchstone:
    noise = values.pop("noise_points")
    self = Touchstone(values.pop("frequency"), values.pop("data"), **values)
    fill(self, noise_points=noise)
    return self


def touchstone_save(path: Path, frequency: Any, data: Any, **options: Any) -> None:
    """Writes networks to a path in one call: path as `Touchstone.save`; frequency, data and options as `Touchstone`."""
    Touchstone(frequency, data, **options).save(path)


def touchstone_write(file: Any, frequency: Any, data: Any, **options: Any) -> None:
    """Writes networks to a file object in one call: file as `Touchstone.write`; frequency, data and options as `Touchstone`."""
    Touchstone(frequency, data, **options).write(file)
