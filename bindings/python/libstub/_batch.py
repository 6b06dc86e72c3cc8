"""Questions about many vias in one call, and the longest stub of one."""

from __future__ import annotations

from typing import Any, Callable, Iterable, Literal, NamedTuple, Sequence

from . import _arrays, _core
from ._criteria import Criteria, Signal, StubLimit
from ._errors import ArgumentError, error_for, warn_range
from ._frozen import SIDE, instance
from ._model import Fidelity, options
from ._via import Side, Via

Errors = Literal["raise", "mark"]


class FirstNotches(NamedTuple):
    """First notches of many vias; arrays with an item per via.

    f1: Hz, lowest over the via's stubs; NaN where it has none where the fidelity looks for one. dk_effective: of that stub. length: of that
    stub, m. status: int32, see `Status`.
    """

    f1: Any
    dk_effective: Any
    length: Any
    status: Any


class Margins(NamedTuple):
    """Margins of many vias; arrays with an item per via, members as `Margin`, passes and limited_by as int32.

    status: int32, see `Status`; where it is below 0 the numbers are NaN and passes is 0.
    """

    passes: Any
    limited_by: Any
    nyquist: Any
    f1: Any
    notch_over_nyquist: Any
    notch_margin: Any
    added_loss_db: Any
    loss_margin_db: Any
    stub_length: Any
    rule_length: Any
    rule_margin: Any
    status: Any


class StubLimits(NamedTuple):
    """Longest stubs of many vias; arrays with an item per via, members as `StubLimit`, limited_by as int32.

    status: int32, see `Status`; where it is below 0 the numbers are NaN.
    """

    limited_by: Any
    length: Any
    stub_length: Any
    margin: Any
    status: Any


def _check_vias(vias: Any) -> list[Via]:
    if isinstance(vias, (Via, str)) or not hasattr(vias, "__iter__"):
        raise TypeError(f"vias: must be a sequence of Via, not {type(vias).__name__}")
    result = list(vias)
    for i, via in enumerate(result):
        if not isinstance(via, Via):
            raise TypeError(f"vias[{i}]: must be a Via, not {type(via).__name__}")
    return result


def _records(name: str, values: Any, cls: type, count: int) -> Any:
    """One record for all, or a list of as many as there are vias."""
    if isinstance(values, cls):
        return values._record  # type: ignore[attr-defined]
    if isinstance(values, str) or not hasattr(values, "__iter__"):
        raise TypeError(f"{name}: must be a {cls.__name__} or a sequence of them, not {type(values).__name__}")
    result = list(values)
    for i, value in enumerate(result):
        instance(f"{name}[{i}]", value, cls, f"a {cls.__name__}")
    if len(result) != count:
        text = f"{name}: {len(result)} items: must be one, or as many as vias ({count})"
        raise ArgumentError(text, _core.E_ARGUMENT, name)
    return [value._record for value in result]


def _pick(records: Any, indices: Sequence[int]) -> Any:
    return tuple(records[i] for i in indices) if isinstance(records, (list, tuple)) else records


def _by_stackup(vias: Sequence[Via]) -> list[list[int]]:
    groups: dict[int, list[int]] = {}
    for i, via in enumerate(vias):
        groups.setdefault(id(via.stackup), []).append(i)
    return list(groups.values())


def _scatter(to: Any, indices: Sequence[int], values: Any) -> None:
    if _arrays.numpy() is not None:
        to[indices] = values
    else:
        for i, value in zip(indices, values):
            to[i] = value


def _run(what: str, vias: Sequence[Via], kinds: str, errors: Any, call: Callable[[Any, Any, Any], Any]) -> list[Any]:
    """Calls call(stackup, indices, columns) once per stackup, in the order of the items; the last column is the status."""
    if errors not in ("raise", "mark"):
        raise ArgumentError(f"errors = {errors!r}: must be 'raise' or 'mark'", _core.E_ARGUMENT, "errors")
    columns = [_arrays.empty((len(vias),), kind) for kind in kinds]
    failures = []
    groups = _by_stackup(vias)
    for indices in groups:
        own = columns if len(groups) == 1 else [_arrays.empty((len(indices),), kind) for kind in kinds]
        failure = call(vias[indices[0]].stackup._handle, indices, own)
        if failure is not None and failure[0] < 0:
            status, field, index, message = failure
            failures.append((indices[index] if 0 <= index < len(indices) else -1, index, status, field, message))
        if own is not columns:
            for to, values in zip(columns, own):
                _scatter(to, indices, values)
    if failures and errors == "raise":
        item, index, status, field, message = min(failures)
        if item != index:
            message = message.replace(f"item {index}:", f"item {item}:", 1)
        raise error_for(status, field, item, message)
    stretched = list(columns[-1]).count(_core.W_RANGE)
    if stretched:
        warn_range(what, stretched, len(vias), "")
    return columns


def first_notch_batch(
    vias: Iterable[Via],
    *,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
    errors: Errors = "raise",
) -> FirstNotches:
    """First notch of many vias, on any number of stackups; the GIL is released meanwhile.

    Parameters
    ----------
    vias : sequence of `Via`
    fidelity, z_ref, annuli : as `Model`
    errors : "raise": the first item that fails raises its exception (with ``index``); "mark": items that fail have
        NaN and their status

    The answer for an item does not depend on its neighbours. One `RangeWarning` with counts. Arrays are float64 and
    int32 (array.array without NumPy).
    """
    items = _check_vias(vias)
    choice = options(fidelity, z_ref, annuli)

    def call(stackup: Any, indices: Sequence[int], columns: Sequence[Any]) -> Any:
        records = tuple(items[i]._record for i in indices)
        return _core.first_notch_batch(stackup, records, choice, *columns)

    return FirstNotches(*_run("first_notch_batch", items, "dddi", errors, call))


def margin_batch(
    vias: Iterable[Via],
    signals: Signal | Iterable[Signal],
    criteria: Criteria | Iterable[Criteria],
    *,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
    errors: Errors = "raise",
) -> Margins:
    """Margins of many vias, on any number of stackups; the GIL is released meanwhile.

    Parameters
    ----------
    vias : sequence of `Via`
    signals, criteria : one for all, or a sequence of as many as vias
    fidelity, z_ref, annuli : as `Model`
    errors : as `first_notch_batch`
    """
    items = _check_vias(vias)
    links = _records("signals", signals, Signal, len(items))
    wanted = _records("criteria", criteria, Criteria, len(items))
    choice = options(fidelity, z_ref, annuli)

    def call(stackup: Any, indices: Sequence[int], columns: Sequence[Any]) -> Any:
        records = tuple(items[i]._record for i in indices)
        return _core.margin_batch(
            stackup, choice, records, _pick(links, indices), _pick(wanted, indices), columns[-1], tuple(columns[:-1])
        )

    return Margins(*_run("margin_batch", items, "ii" + "d" * 9 + "i", errors, call))


def _only_side(via: Via) -> int:
    """The side of a via's only stub. Without a stub either will do: the library says that there is none."""
    stubs = via.stubs
    if len(stubs) > 1:
        raise ArgumentError("side: the via has stubs on both sides: say which, 'top' or 'bottom'", _core.E_ARGUMENT, "side")
    return SIDE.code("side", stubs[0].side) if stubs else _core.SIDE_BOTTOM


def longest_stub(
    via: Via,
    signal: Signal,
    criteria: Criteria,
    *,
    side: Side | None = None,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
) -> StubLimit:
    """Longest tolerable stub: the barrel on one side, drilled back as little as the criteria allow.

    Parameters
    ----------
    via : `Via`; the other side stays as it is
    signal, criteria : what it has to pass
    side : "top" or "bottom"; None: that of the via's only stub
    fidelity, z_ref, annuli : as `Model`

    Found by bracketing on drilled geometries, to 1 nm ("ladder" and "cavity": 0.1 um). Valid as the model is; the criteria are taken to get no better
    as the stub grows. Raises `NoSuchError` for a via without a stub there.
    """
    instance("via", via, Via, "a Via")
    instance("signal", signal, Signal, "a Signal")
    instance("criteria", criteria, Criteria, "a Criteria")
    code = _only_side(via) if side is None else SIDE.code("side", side)
    return StubLimit.of(
        _core.longest_stub(
            via.stackup._handle, via._record, code, options(fidelity, z_ref, annuli), signal._record, criteria._record
        )
    )


def longest_stub_batch(
    vias: Iterable[Via],
    signals: Signal | Iterable[Signal],
    criteria: Criteria | Iterable[Criteria],
    *,
    sides: Side | Iterable[Side] | None = None,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
    errors: Errors = "raise",
) -> StubLimits:
    """Longest tolerable stubs of many vias, on any number of stackups; the GIL is released meanwhile.

    Parameters
    ----------
    vias : sequence of `Via`
    signals, criteria : one for all, or a sequence of as many as vias
    sides : "top" or "bottom" for all, or a sequence of as many as vias; None: that of each via's only stub
    fidelity, z_ref, annuli : as `Model`
    errors : as `first_notch_batch`
    """
    items = _check_vias(vias)
    links = _records("signals", signals, Signal, len(items))
    wanted = _records("criteria", criteria, Criteria, len(items))
    choice = options(fidelity, z_ref, annuli)
    if sides is None:
        codes: Any = [_only_side(via) for via in items]
    elif isinstance(sides, str):
        codes = SIDE.code("sides", sides)
    else:
        codes = [SIDE.code(f"sides[{i}]", side) for i, side in enumerate(sides)]
        if len(codes) != len(items):
            text = f"sides: {len(codes)} items: must be one, or as many as vias ({len(items)})"
            raise ArgumentError(text, _core.E_ARGUMENT, "sides")

    def call(stackup: Any, indices: Sequence[int], columns: Sequence[Any]) -> Any:
        records = tuple(items[i]._record for i in indices)
        return _core.longest_stub_batch(
            stackup, choice, records, _pick(links, indices), _pick(wanted, indices), columns[-1], tuple(columns[:-1]),
            _pick(codes, indices),
        )

    return StubLimits(*_run("longest_stub_batch", items, "idddi", errors, call))
