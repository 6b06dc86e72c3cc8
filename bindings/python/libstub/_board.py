"""Boards in IPC-2581 (revisions B and C), rules, plans written out."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import Any, Callable, Literal, NamedTuple, Union

from . import _core
from ._criteria import Criteria, Signal
from ._errors import NoSuchError
from ._frozen import HOLE, SEVERITY, SIDE, Frozen, Immutable, Status, fill, instance, path_bytes
from ._model import Fidelity, options
from ._plan import Capability, Plan
from ._stackup import Stackup, _layer
from ._via import BackDrill, Edges, Pair, Pin, Ring, Via, Vias, Wall

Path = Union[str, "os.PathLike[str]"]


def _signal(symbol_rate: float, levels: int) -> Signal:
    return Signal(symbol_rate, levels or 2)  # 0 in the header's struct


def _criteria(notch_over_nyquist: float, added_loss_db: float) -> Criteria:
    return Criteria(notch_over_nyquist or None, added_loss_db or None)


class RulesSignal(NamedTuple):
    """A signal of the rules: its name, `Signal`, `Criteria`."""

    name: str
    signal: Signal
    criteria: Criteria


class Rules(Immutable):
    """Which net carries what, and what the fabricator can do. Made by `Rules.parse` or `Rules.load`; immutable.

    Text, one rule a line, ``#`` starts a comment. Lengths need a unit (m mm um mil in), symbol rates Bd MBd GBd;
    patterns know ``*`` and ``?``, case counts, the first match wins. The guide describes each rule.

    >>> rules = Rules.parse('''
    ... signal fast symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2
    ... net TX_* fast
    ... fab depth_tolerance 2 mil
    ... ''')
    >>> rules.match("TX_3")
    'fast'
    >>> rules.signals
    (RulesSignal(name='fast', signal=Signal(baud=53.125 GBd, levels=4), criteria=Criteria(notch_over_nyquist=2)),)
    """

    __slots__ = ("_handle", "_again", "_signals", "__weakref__")
    _handle: Any
    _again: tuple[str, str]
    _signals: tuple[RulesSignal, ...]

    def __init__(self, *args: Any, **kwargs: Any):
        raise TypeError("Rules are made by Rules.parse() or Rules.load()")

    @classmethod
    def _of(cls, handle: Any, again: tuple[str, str]) -> Rules:
        self = object.__new__(cls)
        signals = tuple(
            RulesSignal(name, _signal(*signal), _criteria(*criteria))
            for name, signal, criteria in _core.rules_signals(handle)
        )
        fill(self, _handle=handle, _again=again, _signals=signals)
        return self

    @classmethod
    def load(cls, path: Path) -> Rules:
        """Rules from a file; `ReadError`, `FormatError` with the line. Pickled as the path."""
        return cls._of(_core.rules_load(path_bytes(path)), ("load", os.fspath(path)))

    @classmethod
    def parse(cls, text: str) -> Rules:
        """Rules from text; `FormatError` with the line."""
        instance("text", text, str, "text")
        return cls._of(_core.rules_parse(text.encode()), ("parse", text))

    @property
    def signals(self) -> tuple[RulesSignal, ...]:
        """The signals, in the order of the text."""
        return self._signals

    def match(self, net: str) -> str | None:
        """Name of the signal that a net carries, None for none."""
        instance("net", net, str, "text")
        return self._signal_name(_core.rules_match(self._handle, net))

    def _signal_name(self, index: int) -> str | None:
        return self._signals[index].name if index >= 0 else None

    @property
    def capability(self) -> Capability:
        """What ``fab`` rules say; members without a rule are 0."""
        return Capability.of(_core.rules_capability(self._handle))

    def __reduce__(self) -> Any:
        return getattr(Rules, self._again[0]), (self._again[1],)

    def __repr__(self) -> str:
        return f"Rules({len(self._signals)} signals: {', '.join(signal.name for signal in self._signals)})"


@dataclass(frozen=True, repr=False)
class Hole(Frozen):
    """A plated hole of a board.

    name, net, padstack: "" where the file has none. kind: "via" or "pin" (of a component). signal: name in the rules
    that the board was read with, None: none. partner: number of the hole of the other net of the pair, None: none.
    status: OK, or why it is no via. x, y: m. line: of the file.
    """

    name: str
    net: str
    padstack: str
    kind: Literal["via", "pin"]
    signal: str | None
    partner: int | None
    status: Status
    x: float
    y: float
    line: int


@dataclass(frozen=True, repr=False)
class Notice(Frozen):
    """What the reader has to say about a board file; alike ones are counted, not repeated.

    severity: "note": something used in a way worth knowing; "warning": something missing or contradictory, settled by a
    stated rule; "refused": something not used. line: of the file, of the first one. count: how many like it. message:
    what, where, and the rule it was settled by.
    """

    severity: Literal["note", "warning", "refused"]
    line: int
    count: int
    message: str

    def __str__(self) -> str:
        times = f" ({self.count} times)" if self.count > 1 else ""
        return f"{self.severity}: line {self.line}: {self.message}{times}"


class Board(Immutable):
    """A board file in IPC-2581: a stackup and a via per plated hole. Made by `Board.load`; immutable.

    ``len(board)`` counts the holes. Pickled as its path, rules and stackup name: the file is read again.
    """

    __slots__ = ("_handle", "_path", "_rules", "_stackup", "_stackup_name", "_holes", "__weakref__")
    _handle: Any
    _path: str
    _rules: Rules | None
    _stackup: Stackup
    _stackup_name: str | None
    _holes: tuple[Hole, ...] | None

    def __init__(self, *args: Any, **kwargs: Any):
        raise TypeError("a Board is made by Board.load()")

    @classmethod
    def load(
        cls,
        path: Path,
        rules: Rules | None = None,
        *,
        stackup: str | None = None,
        progress: Callable[[float], Any] | None = None,
    ) -> Board:
        """Reads a board (plain or gzip), twice, streaming; the GIL is released meanwhile.

        Parameters
        ----------
        path : of the file
        rules : `Rules` with signals, returns and defaults; None: none of these
        stackup : name of the one to use where the file has several; None: the first
        progress : called now and then with the fraction done, 0 to 1; an exception raised in it stops the reading and
            comes out of this call

        Raises `ReadError`, `FormatError` with the line, and what a stackup raises. What was missing, contradictory or
        refused is in `notices`.
        """
        instance("rules", rules, (Rules, type(None)), "Rules or None")
        instance("stackup", stackup, (str, type(None)), "text or None")
        if progress is not None and not callable(progress):
            raise TypeError(f"progress: must be callable, not {type(progress).__name__}")
        handle = _core.board_load(path_bytes(path), None if rules is None else rules._handle, stackup, progress)
        self = object.__new__(cls)
        layers = Stackup(_layer(values) for values in _core.board_layers(handle))
        fill(
            self,
            _handle=handle,
            _path=os.fspath(path),
            _rules=rules,
            _stackup=layers,
            _stackup_name=stackup,
            _holes=None,
        )
        return self

    @property
    def path(self) -> str:
        """The file it was read from."""
        return self._path

    @property
    def name(self) -> str:
        """Name of the step that was read."""
        return _core.board_name(self._handle)

    @property
    def rules(self) -> Rules | None:
        """The rules it was read with."""
        return self._rules

    @property
    def stackup(self) -> Stackup:
        """Its `Stackup`."""
        return self._stackup

    @property
    def holes(self) -> tuple[Hole, ...]:
        """Its plated holes, in the order of the file."""
        if self._holes is None:
            fill(self, _holes=tuple(self._hole(values) for values in _core.board_holes(self._handle)))
        return self._holes  # type: ignore[return-value]

    def _hole(self, values: tuple[Any, ...]) -> Hole:
        name, net, padstack, kind, signal, partner, status, x, y, line = values
        known = self._rules._signal_name(signal) if self._rules is not None else None
        kind_word: Any = HOLE.word(kind)
        return Hole(name, net, padstack, kind_word, known, partner if partner >= 0 else None, Status(status), x, y, line)

    @property
    def notices(self) -> list[Notice]:
        """What the reader has to say about the file."""
        return [
            Notice(SEVERITY.word(severity), line, count, message)  # type: ignore[arg-type]
            for severity, line, count, message in _core.board_notices(self._handle)
        ]

    def via(self, index: int) -> Via:
        """Hole number index as a `Via` on the board's stackup; raises what is wrong with it, `IndexError`."""
        length = len(self)
        if not -length <= index < length:
            raise IndexError(f"index = {index}: the board has {length} holes")
        return _via(self._stackup, _core.board_via(self._handle, index % length))

    def plan(
        self,
        rules: Rules | None = None,
        capability: Capability | None = None,
        *,
        fidelity: Fidelity = "default",
        z_ref: float = 50.0,
        annuli: int | None = None,
    ) -> Plan:
        """Plans the board: decision number i is of hole number i. The GIL is released meanwhile.

        Parameters
        ----------
        rules : signal and criteria of each net; None: those that the board was read with
        capability : None: what the rules say
        fidelity, z_ref, annuli : as `Model`

        Raises as `plan`; `NoSuchError` where there are no rules.
        """
        known = self._rules if rules is None else rules
        if known is None:
            raise NoSuchError("rules: the board was read without: give some", _core.E_NONE, "rules")
        instance("rules", known, Rules, "Rules")
        instance("capability", capability, (Capability, type(None)), "a Capability or None")
        shop = None if capability is None else capability._record
        handle = _core.board_plan(self._handle, known._handle, shop, options(fidelity, z_ref, annuli))
        return Plan._of(handle, self._stackup, (_plan_again, (self, known, capability, fidelity, z_ref, annuli)))

    def write(self, plan: Plan, path: Path) -> None:
        """Writes the board file with the back-drills of a plan as standard Backdrill specifications.

        The file is the one read but for a Spec per drill group and a SpecRef at each hole drilled; a path that ends in
        .gz is compressed. It is moved in place when it is whole. The file read must not have changed since. Raises
        `WriteError`, `ReadError`, `FormatError`.
        """
        self._write(_core.board_write, plan, path)

    def write_plan_csv(self, plan: Plan, path: Path) -> None:
        """Writes a plan to a path as a table, a row per plated hole; moved in place when it is whole; `WriteError`."""
        self._write(_core.board_write_plan_csv, plan, path)

    def write_drill_csv(self, plan: Plan, path: Path) -> None:
        """Writes the drill table of a plan to a path, a row per drill group; moved in place when it is whole; `WriteError`."""
        self._write(_core.board_write_drill_csv, plan, path)

    def _write(self, call: Any, plan: Any, path: Path) -> None:
        instance("plan", plan, Plan, "a Plan")
        call(self._handle, plan._handle, path_bytes(path))

    def summary(self, plan: Plan) -> str:
        """The summary a person reads, plain text, lines of at most 100 characters."""
        instance("plan", plan, Plan, "a Plan")
        return _core.board_summary(self._handle, plan._handle)

    def __len__(self) -> int:
        return _core.board_hole_count(self._handle)

    def __reduce__(self) -> Any:
        return _load_again, (self._path, self._rules, self._stackup_name)

    def __repr__(self) -> str:
        return f"Board({self.name!r}, {len(self)} plated holes, {self._stackup!r})"


def _load_again(path: str, rules: Rules | None, stackup: str | None) -> Board:
    return Board.load(path, rules, stackup=stackup)


def _plan_again(
    board: Board, rules: Rules, capability: Capability | None, fidelity: Fidelity, z_ref: float, annuli: int | None = None
) -> Plan:
    return board.plan(rules, capability, fidelity=fidelity, z_ref=z_ref, annuli=annuli)


def _returns(kind: int, distance: float, drill: float, count: int, places: Any, spans: Any) -> Ring | Vias | Wall | None:
    if kind == _core.RETURN_VIAS and places:
        return Vias(places, drill or None, spans or None)
    if kind == _core.RETURN_VIAS:
        return Ring(count, distance, drill or None)
    return Wall(distance) if kind == _core.RETURN_WALL else None


def _backdrills(values: Any) -> tuple[BackDrill, ...]:
    return tuple(BackDrill(SIDE.word(side), depth, size) for side, depth, size in values)  # type: ignore[arg-type]


def _via(stackup: Stackup, values: tuple[Any, ...]) -> Via:
    (
        start, end, drill, pad_start, pad_inner, pad_end, antipad, pads, antipads, clear, nonfunctional, return_kind,
        connects, return_distance, return_drill, return_count, pair_kind, pitch, backdrills, pin_side, pin_length,
        places, outside_dk, lid_distance, hole_dk, spans, partner_backdrills, partner_own, edge_kind, edges,
    ) = values
    pair_shared = pair_kind == _core.PAIR_SHARED
    backs = _backdrills(backdrills)
    left, right, front, back = edges
    return Via(
        stackup,
        drill=drill,
        connects=connects,
        pad_start=pad_start,
        pad_inner=pad_inner,
        pad_end=pad_end,
        antipad=antipad,
        span=(start, end) if (start, end) != (0, 0) else None,
        returns=_returns(return_kind, return_distance, return_drill, return_count, places, spans),
        pair=None
        if pair_kind == _core.PAIR_NONE
        else Pair(pitch, pair_shared, _backdrills(partner_backdrills) if partner_own else None),
        backdrills=backs,
        pin=Pin(SIDE.word(pin_side), pin_length) if pin_side else None,  # type: ignore[arg-type]
        pads=dict(pads),
        antipads=dict(antipads),
        clear=dict(clear),
        nonfunctional_pads=nonfunctional == _core.PADS_KEPT,
        outside_dk=outside_dk or 1.0,
        lid_distance=lid_distance or None,
        hole_dk=hole_dk or 1.0,
        edges=Edges(left, right, front, back, edge_kind == _core.EDGE_SHORTED) if any(edges) else None,
    )
