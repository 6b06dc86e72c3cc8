"""Layers and stackups."""

from __future__ import annotations

import os
from dataclasses import KW_ONLY, dataclass
from typing import Any, Iterable, Literal, NamedTuple, Union

from . import _core
from ._errors import ArgumentError, NoSuchError
from ._frozen import KIND, ROUGHNESS, Frozen, Immutable, fill, instance, number, show
from ._material import Conductor, Dielectric

LayerRef = Union[str, int]  # a layer by its name or by its index from the top


@dataclass(frozen=True, repr=False)
class Layer(Frozen):
    """A layer of a stackup.

    Parameters
    ----------
    name : 1 to 127 bytes; no other layer of the stackup has it
    kind : "dielectric"; "signal": copper with traces, no plane around a barrel; "plane": copper plane; "mixed":
        traces and plane areas, a plane where the via has an antipad
    thickness : m, > 0; of copper also 0: a sheet
    tol_plus, tol_minus : m, >= 0
    dielectric : of a dielectric layer: needed. Of a copper layer: the resin between its copper; None: that of the
        dielectric above, at the top below
    conductor : copper layers only; None: smooth, 5.8e7 S/m

    Types are checked here, ranges with the stackup.

    >>> Layer("TOP", "signal", 35e-6)
    Layer(name='TOP', kind='signal', thickness=35 um)
    """

    name: str
    kind: Literal["dielectric", "signal", "plane", "mixed"]
    thickness: float
    _: KW_ONLY
    tol_plus: float = 0.0
    tol_minus: float = 0.0
    dielectric: Dielectric | None = None
    conductor: Conductor | None = None

    def __post_init__(self) -> None:
        instance("name", self.name, str, "text")
        instance("dielectric", self.dielectric, (Dielectric, type(None)), "a Dielectric")
        instance("conductor", self.conductor, (Conductor, type(None)), "a Conductor")
        fill(
            self,
            thickness=number("thickness", self.thickness),
            tol_plus=number("tol_plus", self.tol_plus),
            tol_minus=number("tol_minus", self.tol_minus),
        )
        values = (
            self.name,
            KIND.code("kind", self.kind),
            self.thickness,
            self.tol_plus,
            self.tol_minus,
            self.dielectric and self.dielectric._record,
            self.conductor and self.conductor._record,
        )
        fill(self, _record=_core.record("layer", values))


def _layer(values: tuple[Any, ...]) -> Layer:
    name, kind, thickness, tol_plus, tol_minus, dielectric, conductor = values
    material = None
    if dielectric is not None:
        dk, in_plane_ratio, loss_tangent, f_ref = dielectric
        material = Dielectric(dk, loss_tangent, in_plane_ratio=in_plane_ratio, f_ref=f_ref)
    metal = None
    if conductor is not None:
        conductivity, roughness, law = conductor
        metal = Conductor(conductivity, roughness, ROUGHNESS.word(law))  # type: ignore[arg-type]
    return Layer(
        name,
        KIND.word(kind),  # type: ignore[arg-type]
        thickness,
        tol_plus=tol_plus,
        tol_minus=tol_minus,
        dielectric=material,
        conductor=metal,
    )


@dataclass(frozen=True, repr=False)
class Interval(Frozen):
    """What lies between two depths of a stackup.

    thickness, m. tol_plus, tol_minus: worst case, the layers' tolerances added, in proportion where a layer is cut, m.
    tol_rss_plus, tol_rss_minus: root of the sum of squares, m. dk_through_plane: layers in series. dk_in_plane: layers
    side by side. loss_tangent: of the in-plane mean, at the layers' own f_ref.
    """

    thickness: float
    tol_plus: float
    tol_minus: float
    tol_rss_plus: float
    tol_rss_minus: float
    dk_through_plane: float
    dk_in_plane: float
    loss_tangent: float


class Depth(NamedTuple):
    """Depths of the upper and the lower face of a layer, m; 0 is the outer face of the top copper layer."""

    top: float
    bottom: float


class Stackup(Immutable):
    """A stackup from its layers, top first. Immutable; may be used by any number of threads.

    Parameters
    ----------
    layers : sequence of `Layer`. At least one copper layer; copper layers are kept apart by dielectrics; dielectrics
        may stand outside the outer copper (solder mask)

    Everything is checked: `ArgumentError`, `GeometryError` with the layer in the message.

    ``len(stackup)`` counts layers, ``stackup[i]`` and iteration give them, with copper layers' dielectric and
    conductor as they are used. Depths are measured downwards in m; 0 is the outer face of the top copper layer.

    >>> core = Dielectric(3.6, 0.004)
    >>> Stackup([Layer("TOP", "signal", 35e-6), Layer("C1", "dielectric", 1e-3, dielectric=core),
    ...          Layer("BOTTOM", "signal", 35e-6)])
    Stackup(2 copper layers of 3, 1.07 mm)
    """

    __slots__ = ("_handle", "_layers", "_hash", "__weakref__")
    _handle: Any
    _layers: tuple[Layer, ...]
    _hash: int

    def __init__(self, layers: Iterable[Layer]):
        records = []
        for i, layer in enumerate(layers):
            instance(f"layers[{i}]", layer, Layer, "a Layer")
            records.append(layer._record)
        handle = _core.stackup_create(tuple(records))
        stored = tuple(_layer(values) for values in _core.stackup_layers(handle))
        fill(self, _handle=handle, _layers=stored, _hash=hash(stored))

    @classmethod
    def load(cls, path: str | os.PathLike[str], *, stackup: str | None = None) -> Stackup:
        """The stackup of a board file in IPC-2581 (plain or gzip).

        Parameters
        ----------
        path : of the file
        stackup : name of the one to use where the file has several; None: the first

        Raises `ReadError`, `FormatError` and what a stackup raises. What the file left open is told by the notices of
        `Board.load`, which also takes rules with default materials.
        """
        from ._board import Board

        return Board.load(path, stackup=stackup).stackup

    @classmethod
    def _of(cls, handle: Any) -> Stackup:
        return cls(_layer(values) for values in _core.stackup_layers(handle))

    def with_in_plane_ratio(self, ratio: float) -> Stackup:
        """The same stackup with that ratio of in-plane to through-plane Dk (0.5 to 2) in all its dielectrics, the resin
        between copper included; `ArgumentError`. `Fit.ratio` is such a one."""
        return Stackup._of(_core.with_in_plane_ratio(self._handle, ratio))

    @property
    def layers(self) -> tuple[Layer, ...]:
        """The layers, top first."""
        return self._layers

    @property
    def copper(self) -> tuple[str, ...]:
        """Names of the copper layers, top first."""
        return tuple(self._layers[i].name for i in _core.stackup_copper(self._handle))

    def index(self, layer: LayerRef) -> int:
        """Index of a layer, counted from 0 at the top over all layers, from its name or index; `NoSuchError`."""
        if isinstance(layer, str):
            return _core.stackup_find(self._handle, layer)
        index = _core.integer("layer", layer)
        _core.stackup_depth(self._handle, index)  # has the library say what is wrong with it
        return index

    def depth(self, layer: LayerRef) -> Depth:
        """Depths of the upper and the lower face of a layer (name or index), m; `NoSuchError`, `ArgumentError`."""
        return Depth(*_core.stackup_depth(self._handle, self.index(layer)))

    def interval(self, top: float, bottom: float) -> Interval:
        """What lies between depth top and depth bottom > top, m, both within the stackup; `ArgumentError`."""
        return Interval(*_core.stackup_interval(self._handle, top, bottom))

    def __len__(self) -> int:
        return len(self._layers)

    def __getitem__(self, layer: LayerRef) -> Layer:
        if isinstance(layer, str):
            return self._layers[self.index(layer)]
        return self._layers[layer]

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Stackup):
            return NotImplemented
        return self is other or (self._hash == other._hash and self._layers == other._layers)

    def __hash__(self) -> int:
        return self._hash

    def __reduce__(self) -> Any:
        return Stackup, (self._layers,)

    def __repr__(self) -> str:
        height = self.depth(len(self) - 1).bottom - self.depth(0).top
        return f"Stackup({len(self.copper)} copper layers of {len(self)}, {show(height, 'm')})"

    def _name(self, index: int) -> str | None:
        return self._layers[index].name if index >= 0 else None


def named_layers(stackup: Stackup, name: str, layers: Any) -> tuple[str, ...]:
    """Layers given by name or index as names; errors say which argument."""
    if isinstance(layers, (str, bytes)) or not hasattr(layers, "__iter__"):
        raise TypeError(f"{name}: must be a sequence of layers, names or indices, not {type(layers).__name__}")
    result = []
    for layer in layers:
        if isinstance(layer, bool) or not (isinstance(layer, str) or hasattr(layer, "__index__")):
            raise TypeError(f"{name}: must hold names or indices of layers, not {type(layer).__name__}")
        try:
            result.append(stackup.layers[stackup.index(layer)].name)
        except (ArgumentError, NoSuchError) as error:
            error.args = (f"{name}: {error}",)
            error.field = name
            raise
    return tuple(result)
