"""What a signal can bear: limits and margins."""

from __future__ import annotations

import enum
from dataclasses import dataclass
from typing import Any, NamedTuple

from . import _core
from ._frozen import Frozen, fill, instance, nonzero, number


class Limit(enum.IntEnum):
    """The criterion with the least margin."""

    NONE = _core.LIMIT_NONE
    NOTCH = _core.LIMIT_NOTCH
    LOSS = _core.LIMIT_LOSS

    def __str__(self) -> str:
        return self.name.lower()


@dataclass(frozen=True, repr=False)
class Signal(Frozen):
    """A serial signal.

    Parameters
    ----------
    baud : symbol rate, Bd, 1e6 to 1e12
    levels : 2: NRZ, 4: PAM4 ... 2 to 64

    Raises `ArgumentError` out of range (the symbol rate is ``symbol_rate`` there).

    >>> link = Signal(baud=53.125e9, levels=4)
    >>> link
    Signal(baud=53.125 GBd, levels=4)
    >>> link.nyquist, link.bit_rate
    (26562500000.0, 106250000000.0)
    """

    baud: float
    levels: int = 2

    def __post_init__(self) -> None:
        fill(self, baud=number("baud", self.baud), levels=_core.integer("levels", self.levels))
        nonzero("levels", self.levels)
        record = _core.record("signal", (self.baud, self.levels))
        _core.signal_nyquist(record)
        fill(self, _record=record)

    @property
    def nyquist(self) -> float:
        """Half the symbol rate, Hz."""
        return _core.signal_nyquist(self._record)

    @property
    def bit_rate(self) -> float:
        """Symbol rate times log2(levels), b/s."""
        return _core.signal_bit_rate(self._record)


@dataclass(frozen=True, repr=False)
class Criteria(Frozen):
    """What is asked of a via; at least one of the two.

    Parameters
    ----------
    notch_over_nyquist : first notch at least this many times Nyquist, > 0; None: not asked
    added_loss_db : loss added at Nyquist at most this, dB, > 0; None: not asked. A notch below Nyquist fails it
        whatever the loss at Nyquist

    Ranges are checked where the criteria are used.

    >>> Criteria(notch_over_nyquist=2.0, added_loss_db=0.3)
    Criteria(notch_over_nyquist=2, added_loss_db=0.3 dB)
    """

    notch_over_nyquist: float | None = None
    added_loss_db: float | None = None

    def __post_init__(self) -> None:
        values = []
        for name in ("notch_over_nyquist", "added_loss_db"):
            value = getattr(self, name)
            if value is not None:
                fill(self, **{name: nonzero(name, value)})
            values.append(getattr(self, name) or 0.0)
        fill(self, _record=_core.record("criteria", tuple(values)))


@dataclass(frozen=True, repr=False)
class Margin(Frozen):
    """What the criteria say of a via for a signal.

    passes: every criterion asked for is met. limited_by: the criterion with the least margin. nyquist, Hz. f1: first
    notch, Hz; inf without a stub or notch below 1e12 Hz. notch_over_nyquist: f1/nyquist. notch_margin: f1 - limit, Hz;
    NaN if not asked. added_loss_db: at Nyquist. loss_margin_db: limit - loss; NaN if not asked. stub_length: longest
    stub, m. rule_length: 0.3 inch Gb/s over the bit rate, m, for comparison only. rule_margin: rule_length -
    stub_length, m.
    """

    passes: bool
    limited_by: Limit
    nyquist: float
    f1: float
    notch_over_nyquist: float
    notch_margin: float
    added_loss_db: float
    loss_margin_db: float
    stub_length: float
    rule_length: float
    rule_margin: float

    @staticmethod
    def of(values: tuple[Any, ...]) -> Margin:
        passes, limited_by, *rest = values
        return Margin(bool(passes), Limit(limited_by), *rest)


@dataclass(frozen=True, repr=False)
class StubLimit(Frozen):
    """The longest stub that passes.

    limited_by: Limit.NONE: even the whole barrel passes. length: longest stub that passes, m; the whole stub if
    nothing limits; 0 if none does. stub_length: of the via as it is, m. margin: length - stub_length, m; where nothing
    limits: 0, a lower bound.
    """

    limited_by: Limit
    length: float
    stub_length: float
    margin: float

    @staticmethod
    def of(values: tuple[Any, ...]) -> StubLimit:
        limited_by, *rest = values
        return StubLimit(Limit(limited_by), *rest)


class SymbolRateLimit(NamedTuple):
    """Highest symbol rate (Bd; inf if nothing limits), and the criterion that limits it."""

    symbol_rate: float
    limited_by: Limit

    @staticmethod
    def of(values: tuple[float, int]) -> SymbolRateLimit:
        return SymbolRateLimit(values[0], Limit(values[1]))


def margin_of(model: Any, signal: Signal, criteria: Criteria) -> Margin:
    instance("signal", signal, Signal, "a Signal")
    instance("criteria", criteria, Criteria, "a Criteria")
    return Margin.of(_core.model_margin(model, signal._record, criteria._record))
