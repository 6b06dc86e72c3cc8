"""Transitions: the whole via with the lines that enter and leave, as a network."""

from __future__ import annotations

import functools
from dataclasses import KW_ONLY, dataclass
from typing import Any, Literal, Sequence, Union

from . import _arrays, _core
from ._errors import ArgumentError
from ._frozen import METAL, MODE, STUBS, Frozen, Immutable, fill, instance, nonzero, number
from ._model import Notch
from ._stackup import LayerRef
from ._trace import Microstrip, Stripline
from ._via import Via

Stubs = Literal["kept", "removed"]
Metal = Literal["lossy", "perfect"]
Mode = Literal["single", "odd", "even"]


@dataclass(frozen=True, repr=False)
class TracePort(Frozen):
    """A port at the end of a trace on one of the layers that the via connects.

    Parameters
    ----------
    layer : name or index
    trace : `Microstrip` or `Stripline`; None: impedance, dk, loss_tangent and width say what it is
    impedance : ohm, 1 to 1000, of the line without trace
    dk : of the line without trace, effective, 1 to 1000; None: 1
    loss_tangent : of the line without trace, 0 to 0.5
    width : m, of the trace without a cross-section, for what happens over the antipads; None: the line is taken to begin
        at the pad
    distance : m, from the axis to the reference plane; None: the rim of the pad
    z_ref : ohm, reference impedance, 1 to 1000

    Ranges are checked with the transition.

    >>> TracePort("INT3", impedance=48.8, dk=3.5, distance=2e-3)
    TracePort(layer='INT3', impedance=48.8 ohm, dk=3.5, distance=2 mm)
    """

    layer: LayerRef
    _: KW_ONLY
    trace: Microstrip | Stripline | None = None
    impedance: float | None = None
    dk: float | None = None
    loss_tangent: float = 0.0
    width: float | None = None
    distance: float | None = None
    z_ref: float = 50.0

    def __post_init__(self) -> None:
        _check_layer(self.layer)
        instance("trace", self.trace, (Microstrip, Stripline, type(None)), "a Microstrip, a Stripline or None")
        fill(self, loss_tangent=number("loss_tangent", self.loss_tangent), z_ref=nonzero("z_ref", self.z_ref))
        for name in ("impedance", "dk", "width", "distance"):
            if getattr(self, name) is not None:
                fill(self, **{name: nonzero(name, getattr(self, name))})

    def _port(self, index: int) -> Any:
        trace = None if self.trace is None else self.trace._record
        parts = (self.impedance or 0.0, self.dk or 0.0, self.loss_tangent, self.width or 0.0, self.distance or 0.0)
        return _core.record("port", (_core.PORT_TRACE, index, trace, *parts, self.z_ref))


@dataclass(frozen=True, repr=False)
class CoaxPort(Frozen):
    """A coaxial line above the plane that the barrel begins on. Its mouth is that plane's antipad, its inner conductor the
    barrel; reference: the plane's lower face.

    Parameters
    ----------
    layer : name or index
    dk : of its filling, 1 to 1000
    z_ref : ohm, reference impedance, 1 to 1000

    Ranges are checked with the transition.
    """

    layer: LayerRef
    _: KW_ONLY
    dk: float = 1.0
    z_ref: float = 50.0

    def __post_init__(self) -> None:
        _check_layer(self.layer)
        fill(self, dk=nonzero("dk", self.dk), z_ref=nonzero("z_ref", self.z_ref))

    def _port(self, index: int) -> Any:
        return _core.record("port", (_core.PORT_COAX, index, None, 0.0, self.dk, 0.0, 0.0, 0.0, self.z_ref))


Port = Union[TracePort, CoaxPort]
_REMARKS = (
    _core.REMARK_RADIATES, _core.REMARK_LAUNCH, _core.REMARK_OUTER, _core.REMARK_SLOT, _core.REMARK_UNEQUAL,
)


def _check_layer(layer: Any) -> None:
    if isinstance(layer, bool) or not (isinstance(layer, str) or hasattr(layer, "__index__")):
        raise TypeError(f"layer: must be a name or an index, not {type(layer).__name__}")


class Transition(Immutable):
    """A whole via as a network, compiled: the cavity model of the barrel with the lines that enter and leave, return vias,
    partner and stubs. Immutable; may be used by any number of threads.

    Parameters
    ----------
    via : `Via`
    ports : sequence of `TracePort` and `CoaxPort`, at least one, no two on one layer. A layer that connects without a port
        carries no trace. Of a pair the partner's ports follow, which mirror them
    stubs : "kept": as drilled; "removed": as if the barrel ended on its outermost connecting layers. What the stubs do is
        the difference
    metal : "lossy": barrel and planes of the stackup's conductors, the barrel's that of its first layer; "perfect": copper
        without loss
    annuli : as `Model`
    table_up_to : Hz, 1e9 to 200e9: S up to there is tabulated once, within 1e-9 of the model, then read in well under a
        microsecond: for sweeps of thousands of frequencies; None: every answer from the model

    Traces leave anywhere but in each other's way: all stand out from the axis alone. Gives a `RangeWarning` where the
    transition is beyond what the model was compared with: see remarks. Valid to 110e9 Hz. Raises `ArgumentError`,
    `GeometryError`, `UnsupportedError` with the port in the message. Source: docs/theory.md.

    >>> core = Dielectric(3.5, 0.005)
    >>> board = Stackup([Layer("L1", "plane", 0), Layer("D1", "dielectric", 2e-4, dielectric=core),
    ...                  Layer("L2", "plane", 0), Layer("D2", "dielectric", 1e-4, dielectric=core),
    ...                  Layer("L3", "signal", 0), Layer("D3", "dielectric", 1e-4, dielectric=core),
    ...                  Layer("L4", "plane", 0), Layer("D4", "dielectric", 2e-4, dielectric=core),
    ...                  Layer("L5", "plane", 0)])
    >>> via = Via(board, drill=2.5e-4, pads={"L3": 4.5e-4}, antipad=7e-4, connects=("L1", "L3"), returns=Ring(4, 9e-4),
    ...           antipads={"L1": 7e-4})
    >>> line = TracePort("L3", impedance=48.8, dk=3.5, loss_tangent=0.005, width=1.13e-4, distance=2e-3)
    >>> through = via.transition([CoaxPort("L1", dk=1.5), line])
    >>> through
    Transition(2 ports; stubs='kept')
    >>> round(float(abs(through.s(1e9)[1][0])), 2)
    1.0
    """

    __slots__ = ("_handle", "_via", "_given", "_stubs", "_metal", "_annuli", "_table", "_reference", "__weakref__")
    _handle: Any
    _via: Via
    _given: tuple[Port, ...]
    _stubs: Stubs
    _metal: Metal
    _annuli: int | None
    _table: float | None
    _reference: tuple[float, ...]

    def __init__(
        self, via: Via, ports: Sequence[Port], *, stubs: Stubs = "kept", metal: Metal = "lossy", annuli: int | None = None,
        table_up_to: float | None = None,
    ):
        instance("via", via, Via, "a Via")
        instance("ports", ports, (list, tuple), "a sequence of TracePort and CoaxPort")
        records = []
        for i, port in enumerate(ports):
            instance(f"ports[{i}]", port, (TracePort, CoaxPort), "a TracePort or a CoaxPort")
            records.append(port._port(via.stackup.index(port.layer)))
        count = 0 if annuli is None else _core.integer("annuli", annuli)
        if annuli is not None and count == 0:  # which would mean the default to the C library
            raise ArgumentError("annuli = 0: must be >= 2 and <= 12", _core.E_ARGUMENT, "annuli")
        table = 0.0 if table_up_to is None else _core.number("table_up_to", table_up_to)
        if table_up_to is not None and table == 0.0:  # which would mean none to the C library
            raise ArgumentError("table_up_to = 0 Hz: must be >= 1e9 and <= 200e9", _core.E_ARGUMENT, "table_up_to")
        options = _core.record("transition", (STUBS.code("stubs", stubs), count, METAL.code("metal", metal), table))
        handle = _core.transition_create(via.stackup._handle, via._record, tuple(records), options)
        fill(self, _handle=handle, _via=via, _given=tuple(ports), _stubs=stubs, _metal=metal, _annuli=annuli, _table=table_up_to)
        fill(self, _reference=_core.transition_reference(handle))

    @property
    def via(self) -> Via:
        """The via it was compiled from."""
        return self._via

    @property
    def ports(self) -> tuple[Port, ...]:
        """The ports as given: those of the first barrel."""
        return self._given

    @property
    def stubs(self) -> Stubs:
        """Whether the stubs are kept or removed."""
        return self._stubs

    @property
    def metal(self) -> Metal:
        """Whether the copper of barrel and planes has loss."""
        return self._metal

    @property
    def annuli(self) -> int | None:
        """The annuli asked for; None: the default."""
        return self._annuli

    @property
    def table_up_to(self) -> float | None:
        """How far up S is tabulated, Hz; None: not at all."""
        return self._table

    @property
    def reference(self) -> tuple[float, ...]:
        """Reference impedances of all ports, ohm: those given, of a pair then the partner's."""
        return self._reference

    @property
    def remarks(self) -> tuple[str, ...]:
        """What the transition rests on, or not, in words: no return via near, ranges of fits left, and the like."""
        found = _core.transition_remarks(self._handle)
        return tuple(_core.remark_text(remark) for remark in _REMARKS if found & remark)

    def s(self, f: Any, *, out: Any = None) -> Any:
        """S-parameters, referred to `reference`.

        Parameters
        ----------
        f : Hz, 1e6 to 200e9: a number, or an array of any shape
        out : where to write to: a C-contiguous buffer of as many complex128, or of twice as many float64 (re, im
            pairs), apart from f; None: a new array

        Returns complex128 of shape (n, p, p) for n frequencies and p ports, row: port the wave comes out of, column: port
        driven; for a number (p, p); or out. Time factor exp(+jwt). As it is for scikit-rf:
        ``skrf.Network(f=f, f_unit="hz", s=t.s(f), z0=t.reference)``. Without NumPy a `ComplexArray`. Gives one
        `RangeWarning` for frequencies above the stated range: 110e9, or a trace's. Raises `ArgumentError` with the index of
        a frequency out of range.
        """
        count = len(self._reference)
        return _arrays.evaluate(functools.partial(_core.transition_s, self._handle), f, "Z", out, (count, count))

    def notches(self, up_to: float, *, to: int = 1, from_: int = 0, mode: Mode = "single") -> list[Notch]:
        """Minima of the transmission |S| up to a frequency (Hz, to 200e9), in rising order.

        Parameters
        ----------
        up_to : Hz
        to, from_ : numbers of the ports the wave comes out of and goes into, from 0; of a mode, those of the first barrel
        mode : "single": of one port driven. Of a pair: "odd": both barrels with opposite signs (Sdd); "even": with equal
            signs (Scc)

        As `Model.notches`, with depth_db against a line without loss, f_series and error NaN, stub -1. Empty where there are none. Raises `ArgumentError`, `NoSuchError`.
        """
        code = MODE.code("mode", mode)
        return [Notch(*values) for values in _core.transition_notches(self._handle, code, to, from_, up_to)]

    def __reduce__(self) -> Any:
        return _rebuild, (self._via, self._given, self._stubs, self._metal, self._annuli, self._table)

    def __repr__(self) -> str:
        metal = "" if self._metal == "lossy" else f", metal={self._metal!r}"
        annuli = "" if self._annuli is None else f", annuli={self._annuli}"
        return f"Transition({len(self._reference)} ports; stubs={self._stubs!r}{metal}{annuli})"


def _rebuild(via: Via, ports: Sequence[Port], stubs: Stubs, metal: Metal, annuli: int | None, table: float | None) -> Transition:
    return Transition(via, ports, stubs=stubs, metal=metal, annuli=annuli, table_up_to=table)
