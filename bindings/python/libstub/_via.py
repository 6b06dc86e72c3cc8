"""Vias: the geometry of one barrel, and its stub pieces."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Iterable, Literal, Mapping, Sequence

from . import _core
from ._errors import ArgumentError, GeometryError
from ._frozen import SIDE, Frozen, Immutable, fill, instance, nonzero, number, show
from ._stackup import LayerRef, Stackup, named_layers

if TYPE_CHECKING:
    from ._model import Fidelity, Model
    from ._transition import Metal, Port, Stubs, Transition

Side = Literal["top", "bottom"]


@dataclass(frozen=True, repr=False)
class Ring(Frozen):
    """Return vias on a circle around the barrel.

    Parameters
    ----------
    count : 1 to 1000
    distance : radius of the circle, m, > 0
    drill : diameter of the return vias, m; None: that of the via

    >>> Ring(4, 40 * 25.4e-6)
    Ring(count=4, distance=40 mil)
    """

    count: int
    distance: float
    drill: float | None = None

    def __post_init__(self) -> None:
        fill(self, count=_core.integer("count", self.count), distance=number("distance", self.distance))
        if self.drill is not None:
            fill(self, drill=nonzero("drill", self.drill))


@dataclass(frozen=True, repr=False)
class Vias(Frozen):
    """Return vias at given places.

    Parameters
    ----------
    positions : 1 to 1000 pairs x, y about the axis of the barrel, m. The partner of a pair is at (pitch, 0)
    drill : diameter of the return vias, m; None: that of the via
    spans : for each the first and the last layer it joins, names or indices; None, as a whole or for one: all copper

    >>> Vias([(0.65e-3, 0.0), (-0.65e-3, 0.0)], spans=[("L2", "L5"), None])
    Vias(positions=((0.65 mm, 0 m), (-0.65 mm, 0 m)), spans=(('L2', 'L5'), None))
    """

    positions: tuple[tuple[float, float], ...]
    drill: float | None = None
    spans: Sequence[tuple[LayerRef, LayerRef] | None] | None = None

    def __post_init__(self) -> None:
        if isinstance(self.positions, str) or not hasattr(self.positions, "__iter__"):
            raise TypeError(f"positions: must be a sequence of pairs x, y, not {type(self.positions).__name__}")
        fill(self, positions=tuple(_point(f"positions[{i}]", point) for i, point in enumerate(self.positions)))
        if not 1 <= len(self.positions) <= 1000:
            text = f"positions: {len(self.positions)} return vias: must be 1 to 1000"
            raise ArgumentError(text, _core.E_ARGUMENT, "positions")
        if self.drill is not None:
            fill(self, drill=nonzero("drill", self.drill))
        if self.spans is not None:
            fill(self, spans=_pairs_of_layers(self.spans, len(self.positions)))

    def _on(self, stackup: Stackup) -> Vias:
        """The same with layers by name."""
        if self.spans is None:
            return self
        spans = [None if span is None else named_layers(stackup, f"spans[{i}]", span) for i, span in enumerate(self.spans)]
        return Vias(self.positions, self.drill, spans)  # type: ignore[arg-type]

    def _span_indices(self, stackup: Stackup) -> tuple[tuple[int, int], ...]:
        if self.spans is None:
            return ()
        copper = stackup.copper
        whole = (copper[0], copper[-1])
        return tuple((stackup.index(first), stackup.index(last)) for first, last in (span or whole for span in self.spans))

    def __repr__(self) -> str:
        places = [f"({show(x, 'm')}, {show(y, 'm')})" for x, y in self.positions]
        drill = "" if self.drill is None else f", drill={show(self.drill, 'm')}"
        spans = "" if self.spans is None else f", spans={self.spans!r}"
        return f"Vias(positions=({', '.join(places)}{',' if len(places) == 1 else ''}){drill}{spans})"


def _pairs_of_layers(spans: Any, count: int) -> tuple[tuple[LayerRef, LayerRef] | None, ...]:
    if isinstance(spans, str) or not hasattr(spans, "__iter__"):
        raise TypeError(f"spans: must be a sequence of pairs of layers, not {type(spans).__name__}")
    result = []
    for i, span in enumerate(spans):
        if span is not None and (isinstance(span, str) or not hasattr(span, "__iter__")):
            raise TypeError(f"spans[{i}]: must be a pair of layers or None, not {type(span).__name__}")
        result.append(None if span is None else tuple(span))
        if span is not None and len(result[-1]) != 2:  # type: ignore[arg-type]
            raise ArgumentError(f"spans[{i}]: {len(tuple(span))} layers: must be two", _core.E_ARGUMENT, "spans")
    if len(result) != count:
        raise ArgumentError(f"spans: {len(result)}: must be as many as positions ({count})", _core.E_ARGUMENT, "spans")
    return tuple(result)


def _point(name: str, point: Any) -> tuple[float, float]:
    if isinstance(point, str) or not hasattr(point, "__iter__"):
        raise TypeError(f"{name}: must be a pair x, y, not {type(point).__name__}")
    values = tuple(number(name, value) for value in point)
    if len(values) != 2:
        raise ArgumentError(f"{name}: {len(values)} numbers: must be a pair x, y", _core.E_ARGUMENT, name)
    return values


@dataclass(frozen=True, repr=False)
class Wall(Frozen):
    """A closed return wall at a distance from the axis (m, > 0)."""

    distance: float

    def __post_init__(self) -> None:
        fill(self, distance=number("distance", self.distance))


@dataclass(frozen=True, repr=False)
class Pair(Frozen):
    """The partner barrel of a differential pair.

    Parameters
    ----------
    pitch : axis to axis, m, > drill
    shared : one antipad around both (the union and the band between them) instead of one each
    backdrills : sequence of `BackDrill` of the partner, which may be empty; None: it is drilled as the barrel is
    """

    pitch: float
    shared: bool = False
    backdrills: Sequence[BackDrill] | None = None

    def __post_init__(self) -> None:
        instance("shared", self.shared, bool, "True or False")
        fill(self, pitch=number("pitch", self.pitch))
        if self.backdrills is not None:
            fill(self, backdrills=_backdrills(self.backdrills))


@dataclass(frozen=True, repr=False)
class Edges(Frozen):
    """Straight edges of all planes: a rectangle around the via, seen from above. Distances from the axis, m, > 0.

    Parameters
    ----------
    left, right : towards -x, +x
    front, back : towards -y, +y
    shorted : the planes are joined to each other all along them; else bare

    The partner of a pair is at (pitch, 0).

    >>> Edges(4e-3, 6e-3, 5e-3, 5e-3)
    Edges(left=4 mm, right=6 mm, front=5 mm, back=5 mm)
    """

    left: float
    right: float
    front: float
    back: float
    shorted: bool = False

    def __post_init__(self) -> None:
        instance("shorted", self.shorted, bool, "True or False")
        fill(self, **{name: nonzero(name, getattr(self, name)) for name in ("left", "right", "front", "back")})


@dataclass(frozen=True, repr=False)
class BackDrill(Frozen):
    """A back-drill that has been made or is to be made.

    Parameters
    ----------
    side : "top" or "bottom"
    depth : from the outer face of that side's outer copper to the tip, m
    diameter : of the bit, m, at least the drill
    """

    side: Side
    depth: float
    diameter: float

    def __post_init__(self) -> None:
        SIDE.code("side", self.side)
        fill(self, depth=number("depth", self.depth), diameter=number("diameter", self.diameter))


def _backdrills(values: Any) -> tuple[BackDrill, ...]:
    instance("backdrills", values, (list, tuple), "a sequence of BackDrill")
    for item in values:
        instance("backdrills", item, BackDrill, "a sequence of BackDrill")
    return tuple(values)


@dataclass(frozen=True, repr=False)
class Pin(Frozen):
    """A press-fit pin, and the barrel that it needs.

    Parameters
    ----------
    side : "top" or "bottom", where it enters
    length : least barrel to keep from that side's surface, m
    """

    side: Side
    length: float

    def __post_init__(self) -> None:
        SIDE.code("side", self.side)
        fill(self, length=number("length", self.length))


@dataclass(frozen=True, repr=False)
class Stub(Frozen):
    """A piece of barrel beyond the outermost layers that connect. Lengths and depths in m.

    side, exit_layer (the connecting layer it hangs on), end_layer (the outer layer its barrel ends on; None where it
    was drilled), top and bottom (depths of its ends), length (nominal), length_min and length_max (worst case over the
    stackup's tolerances; of a drilled end over all layers to the surface it was drilled from, and without the drill's
    own: <= 0 where it may be cut off), length_rss_min and length_rss_max (root of the sum of squares).
    """

    side: Side
    exit_layer: str
    end_layer: str | None
    top: float
    bottom: float
    length: float
    length_min: float
    length_max: float
    length_rss_min: float
    length_rss_max: float

    def __repr__(self) -> str:
        where = "below" if self.side == "bottom" else "above"
        return f"Stub({self.side}, {show(self.length, 'm')} {where} {self.exit_layer})"


def stubs_of(stackup: Stackup, values: Iterable[tuple[Any, ...]]) -> list[Stub]:
    return [
        Stub(SIDE.word(side), stackup.layers[exit_layer].name, stackup._name(end_layer), *rest)  # type: ignore[arg-type]
        for side, exit_layer, end_layer, *rest in values
    ]


def _values_on_layers(stackup: Stackup, name: str, values: Any) -> tuple[tuple[str, float], ...]:
    if values is None:
        return ()
    if not isinstance(values, Mapping):
        raise TypeError(f"{name}: must be a dict of layers and diameters, not {type(values).__name__}")
    names = named_layers(stackup, name, values.keys())
    return tuple((layer, number(f"{name}[{layer!r}]", value)) for layer, value in zip(names, values.values()))


def _diameter(name: str, value: Any, default: float) -> float:
    return default if value is None else number(name, value)


class Via(Immutable):
    """A via on a stackup. Immutable; checked when it is made. Lengths in m, diameters not radii.

    Layers are given by name or by index from the top.

    Parameters
    ----------
    stackup : `Stackup` it is drilled into
    drill : barrel diameter (drilled hole), > 0
    connects : layers where the signal enters or leaves, in any order: one or more copper layers within the span
    pad : pad diameter at the start, on inner layers and at the end; None: none; else >= drill
    pad_start, pad_inner, pad_end : the same one by one, in place of pad. pad_inner is on the inner layers that connect,
        and on all of them with nonfunctional_pads
    antipad : on every plane crossed that does not connect; None: mixed layers are no plane here, and planes need an
        entry in antipads
    span : (start, end), copper layers the barrel runs from and to; None: through, from the first copper to the last
    returns : `Ring` of return vias, `Vias` at given places, `Wall`, or None: no return near, the plate pairs carry it
        and radiate
    pair : `Pair`, or None
    backdrills : sequence of `BackDrill`, at most one a side
    pin : `Pin`, or None
    pads : {layer: diameter} that replace the pads above; 0: no pad
    antipads : {layer: diameter} that replace the antipad; 0: no plane at the via on this layer; on a plane that connects:
        the opening that the signal comes through
    clear : {layer: diameter} free of other copper around the axis (for the drill bit), where known
    nonfunctional_pads : pads on inner layers that do not connect are kept
    outside_dk : of what lies beyond the outer copper, 1 to 1000
    lid_distance : from the outer copper to a conducting lid; None: open space
    hole_dk : of what fills a drilled hole, 1 to 1000
    edges : `Edges` of the planes, or None: planes without end

    Raises `ArgumentError`, `GeometryError` or `NoSuchError` with the member, value and layer.

    >>> core = Dielectric(3.6, 0.004)
    >>> board = Stackup([Layer("TOP", "signal", 35e-6), Layer("D1", "dielectric", 2e-4, dielectric=core),
    ...                  Layer("GND", "plane", 35e-6), Layer("D2", "dielectric", 2e-4, dielectric=core),
    ...                  Layer("INT", "signal", 35e-6), Layer("D3", "dielectric", 1e-3, dielectric=core),
    ...                  Layer("BOTTOM", "signal", 35e-6)])
    >>> via = Via(board, drill=2.5e-4, pad=5e-4, antipad=7.5e-4, connects=("TOP", "INT"), returns=Ring(4, 1e-3))
    >>> via
    Via(TOP to BOTTOM, drill=0.25 mm, connects=('TOP', 'INT'), pad=0.5 mm, antipad=0.75 mm, returns=Ring(count=4, distance=1 mm))
    >>> via.stubs
    [Stub(bottom, 1.035 mm below INT)]
    """

    __slots__ = (
        "stackup", "drill", "connects", "pad_start", "pad_inner", "pad_end", "antipad", "span", "returns", "pair",
        "backdrills", "pin", "_pads", "_antipads", "_clear", "nonfunctional_pads",
        "outside_dk", "lid_distance", "hole_dk", "edges", "_record", "__weakref__",
    )
    stackup: Stackup
    drill: float
    connects: tuple[str, ...]
    pad_start: float
    pad_inner: float
    pad_end: float
    antipad: float
    span: tuple[str, str] | None
    returns: Ring | Vias | Wall | None
    pair: Pair | None
    backdrills: tuple[BackDrill, ...]
    pin: Pin | None
    nonfunctional_pads: bool
    outside_dk: float
    lid_distance: float | None
    hole_dk: float
    edges: Edges | None
    _pads: tuple[tuple[str, float], ...]
    _antipads: tuple[tuple[str, float], ...]
    _clear: tuple[tuple[str, float], ...]
    _record: Any

    def __init__(
        self,
        stackup: Stackup,
        *,
        drill: float,
        connects: Sequence[LayerRef],
        pad: float | None = None,
        pad_start: float | None = None,
        pad_inner: float | None = None,
        pad_end: float | None = None,
        antipad: float | None = None,
        span: tuple[LayerRef, LayerRef] | None = None,
        returns: Ring | Vias | Wall | None = None,
        pair: Pair | None = None,
        backdrills: Sequence[BackDrill] = (),
        pin: Pin | None = None,
        pads: Mapping[Any, float] | None = None,
        antipads: Mapping[Any, float] | None = None,
        clear: Mapping[Any, float] | None = None,
        nonfunctional_pads: bool = False,
        outside_dk: float = 1.0,
        lid_distance: float | None = None,
        hole_dk: float = 1.0,
        edges: Edges | None = None,
    ):
        instance("stackup", stackup, Stackup, "a Stackup")
        instance("returns", returns, (Ring, Vias, Wall, type(None)), "a Ring, Vias, a Wall or None")
        instance("pair", pair, (Pair, type(None)), "a Pair or None")
        instance("pin", pin, (Pin, type(None)), "a Pin or None")
        instance("nonfunctional_pads", nonfunctional_pads, bool, "True or False")
        instance("edges", edges, (Edges, type(None)), "Edges or None")
        common = _diameter("pad", pad, 0.0)
        fill(
            self,
            stackup=stackup,
            drill=number("drill", drill),
            connects=named_layers(stackup, "connects", connects),
            pad_start=_diameter("pad_start", pad_start, common),
            pad_inner=_diameter("pad_inner", pad_inner, common),
            pad_end=_diameter("pad_end", pad_end, common),
            antipad=_diameter("antipad", antipad, 0.0),
            span=_span(stackup, span),
            returns=returns._on(stackup) if isinstance(returns, Vias) else returns,
            pair=pair,
            backdrills=_backdrills(backdrills),
            pin=pin,
            _pads=_values_on_layers(stackup, "pads", pads),
            _antipads=_values_on_layers(stackup, "antipads", antipads),
            _clear=_values_on_layers(stackup, "clear", clear),
            nonfunctional_pads=nonfunctional_pads,
            outside_dk=nonzero("outside_dk", outside_dk),
            lid_distance=None if lid_distance is None else nonzero("lid_distance", lid_distance),
            hole_dk=nonzero("hole_dk", hole_dk),
            edges=edges,
        )
        record = _core.record("via", self._values())
        _core.via_check(stackup._handle, record)
        fill(self, _record=record)

    def _values(self) -> tuple[Any, ...]:
        """The members of the header's struct, in its order."""
        index = self.stackup.index
        start, end = (0, 0) if self.span is None else (index(self.span[0]), index(self.span[1]))
        ring = self.returns if isinstance(self.returns, Ring) else None
        places = self.returns.positions if isinstance(self.returns, Vias) else ()
        drill = self.returns.drill if isinstance(self.returns, (Ring, Vias)) else None
        pair = _core.PAIR_NONE
        if self.pair is not None:
            pair = _core.PAIR_SHARED if self.pair.shared else _core.PAIR_SEPARATE
        own, edges = self.pair.backdrills if self.pair is not None else None, self.edges
        kind = _core.RETURN_NONE
        if self.returns is not None:
            kind = _core.RETURN_WALL if isinstance(self.returns, Wall) else _core.RETURN_VIAS
        return (
            start,
            end,
            self.drill,
            self.pad_start,
            self.pad_inner,
            self.pad_end,
            self.antipad,
            tuple((index(layer), value) for layer, value in self._pads),
            tuple((index(layer), value) for layer, value in self._antipads),
            tuple((index(layer), value) for layer, value in self._clear),
            _core.PADS_KEPT if self.nonfunctional_pads else _core.PADS_REMOVED,
            kind,
            tuple(index(layer) for layer in self.connects),
            self.returns.distance if isinstance(self.returns, (Ring, Wall)) else 0.0,
            drill if drill is not None else 0.0,
            ring.count if ring is not None else len(places),
            pair,
            self.pair.pitch if self.pair is not None else 0.0,
            _drill_values(self.backdrills),
            SIDE.code("side", self.pin.side) if self.pin is not None else 0,
            self.pin.length if self.pin is not None else 0.0,
            places,
            self.outside_dk,
            self.lid_distance if self.lid_distance is not None else 0.0,
            self.hole_dk,
            self.returns._span_indices(self.stackup) if isinstance(self.returns, Vias) else (),
            _drill_values(own or ()),
            int(own is not None),
            _core.EDGE_SHORTED if edges is not None and edges.shorted else _core.EDGE_OPEN,
            (edges.left, edges.right, edges.front, edges.back) if edges is not None else (0.0,) * 4,
        )

    @property
    def pads(self) -> dict[str, float]:
        """Diameters that replace the pads on some layers, m."""
        return dict(self._pads)

    @property
    def antipads(self) -> dict[str, float]:
        """Diameters that replace the antipad on some layers, m."""
        return dict(self._antipads)

    @property
    def clear(self) -> dict[str, float]:
        """Diameters free of other copper on some layers, m."""
        return dict(self._clear)

    @property
    def stubs(self) -> list[Stub]:
        """The stub pieces, top one first: none, one or two `Stub`."""
        return stubs_of(self.stackup, _core.via_stubs(self.stackup._handle, self._record))

    def model(self, *, fidelity: Fidelity = "default", z_ref: float = 50.0, annuli: int | None = None) -> Model:
        """The electrical model of this via, compiled; fidelity, z_ref (ohm) and annuli as `Model`."""
        from ._model import Model

        return Model(self, fidelity=fidelity, z_ref=z_ref, annuli=annuli)

    def transition(
        self, ports: Sequence[Port], *, stubs: Stubs = "kept", metal: Metal = "lossy", annuli: int | None = None,
        table_up_to: float | None = None,
    ) -> Transition:
        """The whole via as a network, compiled; ports, stubs, metal, annuli and table_up_to as `Transition`."""
        from ._transition import Transition

        return Transition(self, ports, stubs=stubs, metal=metal, annuli=annuli, table_up_to=table_up_to)

    def replace(self, **changes: Any) -> Via:
        """The same via but for some arguments, also on another stackup (layers are carried over by name).

        A new ``pad`` replaces all three pads.
        """
        arguments = self._arguments()
        if "pad" in changes:
            for name in ("pad_start", "pad_inner", "pad_end"):
                del arguments[name]
        return Via(**{**arguments, **changes})

    def _arguments(self) -> dict[str, Any]:
        return {
            "stackup": self.stackup, "drill": self.drill, "connects": self.connects, "pad_start": self.pad_start,
            "pad_inner": self.pad_inner, "pad_end": self.pad_end, "antipad": self.antipad, "span": self.span,
            "returns": self.returns, "pair": self.pair, "backdrills": self.backdrills, "pin": self.pin,
            "pads": self.pads, "antipads": self.antipads, "clear": self.clear,
            "nonfunctional_pads": self.nonfunctional_pads, "outside_dk": self.outside_dk,
            "lid_distance": self.lid_distance, "hole_dk": self.hole_dk, "edges": self.edges,
        }

    def _key(self) -> tuple[Any, ...]:
        return (
            self.stackup, self.drill, self.connects, self.pad_start, self.pad_inner, self.pad_end, self.antipad,
            self.span, self.returns, self.pair, self.backdrills, self.pin, self._pads, self._antipads, self._clear,
            self.nonfunctional_pads, self.outside_dk, self.lid_distance, self.hole_dk, self.edges,
        )

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Via):
            return NotImplemented
        return self._key() == other._key()

    def __hash__(self) -> int:
        return hash(self._key())

    def __reduce__(self) -> Any:
        return _rebuild_via, (self._arguments(),)

    def __repr__(self) -> str:
        copper = self.stackup.copper
        start, end = self.span or (copper[0], copper[-1])
        parts = [f"{start} to {end}", f"drill={show(self.drill, 'm')}", f"connects={self.connects!r}"]
        if self.pad_start == self.pad_inner == self.pad_end:
            sizes = {"pad": self.pad_start}
        else:
            sizes = {"pad_start": self.pad_start, "pad_inner": self.pad_inner, "pad_end": self.pad_end}
        sizes["antipad"] = self.antipad
        parts += [f"{name}={show(size, 'm')}" for name, size in sizes.items() if size]
        for name in ("pads", "antipads", "clear"):
            values = getattr(self, name)
            if values:
                parts.append(f"{name}={{{', '.join(f'{k!r}: ' + show(v, 'm') for k, v in values.items())}}}")
        for name in ("returns", "pair", "backdrills", "pin", "nonfunctional_pads", "edges"):
            if getattr(self, name):
                parts.append(f"{name}={getattr(self, name)!r}")
        for name in ("outside_dk", "hole_dk"):
            if getattr(self, name) != 1.0:
                parts.append(f"{name}={getattr(self, name):g}")
        if self.lid_distance is not None:
            parts.append(f"lid_distance={show(self.lid_distance, 'm')}")
        return f"Via({', '.join(parts)})"


def _drill_values(drills: Iterable[BackDrill]) -> tuple[tuple[int, float, float], ...]:
    return tuple((SIDE.code("side", b.side), b.depth, b.diameter) for b in drills)


def _rebuild_via(arguments: dict[str, Any]) -> Via:
    return Via(**arguments)


def _span(stackup: Stackup, span: Any) -> tuple[str, str] | None:
    if span is None:
        return None
    names = named_layers(stackup, "span", span)
    if len(names) != 2:
        raise TypeError(f"span: must be two layers, start and end, not {len(names)}")
    if names[0] == names[1]:
        # 0 and 0 would mean "through" to the C library
        raise GeometryError(f"span: start and end are the same layer '{names[0]}'", _core.E_GEOMETRY, "span")
    return names[0], names[1]
