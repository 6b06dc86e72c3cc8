"""Plans: what to do about the stubs of a board."""

from __future__ import annotations

import enum
from collections.abc import Sequence as SequenceABC
from dataclasses import dataclass
from typing import Any, Callable, Iterable, Iterator, Literal, Sequence, overload

from . import _core
from ._criteria import Criteria, Margin, Signal
from ._errors import GeometryError
from ._frozen import SIDES, TOLERANCE, Frozen, Immutable, Status, fill, instance, number, show
from ._model import Fidelity, options
from ._stackup import Stackup
from ._via import Side, Via


class Action(enum.IntEnum):
    """What is done about a via; ``str()`` is a plain word for it."""

    NOT_JUDGED = _core.ACTION_NOT_JUDGED
    KEEP = _core.ACTION_KEEP
    DRILL_TOP = _core.ACTION_DRILL_TOP
    DRILL_BOTTOM = _core.ACTION_DRILL_BOTTOM
    DRILL_BOTH = _core.ACTION_DRILL_BOTH
    CANNOT = _core.ACTION_CANNOT
    REFUSED = _core.ACTION_REFUSED

    def __str__(self) -> str:
        return _core.action_name(self.value)


class Reason(enum.IntEnum):
    """Why; ``str()`` is a plain word for it."""

    NO_SIGNAL = _core.REASON_NO_SIGNAL
    NO_STUB = _core.REASON_NO_STUB
    PASSES = _core.REASON_PASSES
    FAILS = _core.REASON_FAILS
    LIMIT_TOO_SHORT = _core.REASON_LIMIT_TOO_SHORT
    NO_ROOM = _core.REASON_NO_ROOM
    SIDE = _core.REASON_SIDE
    WALL = _core.REASON_WALL
    ASPECT = _core.REASON_ASPECT
    DEPTHS = _core.REASON_DEPTHS
    PIN = _core.REASON_PIN
    BURIED = _core.REASON_BURIED
    DRILLED = _core.REASON_DRILLED
    ERROR = _core.REASON_ERROR
    ONE_LAYER = _core.REASON_ONE_LAYER

    def __str__(self) -> str:
        return _core.reason_name(self.value)


@dataclass(frozen=True, repr=False, kw_only=True)
class Capability(Frozen):
    """What the fabricator can do. Confirm the numbers with the fabricator. Lengths in m.

    Parameters
    ----------
    sides : that may be drilled: "top", "bottom" or "both"
    tolerance : "worst": drill and stackup tolerances added; "rss": root of the sum of squares
    depth_tolerance : drilled depth, plus or minus
    cut_clearance : least distance from the tip to the must-not-cut layer, with the tolerances used up
    residual_min : least residual stub, nominal
    residual_target : residual stub aimed at where there is room, nominal
    bit_oversize : bit diameter less drill diameter
    wall_clearance : least distance from the wall of the drilled hole to copper
    aspect_ratio : greatest drilled depth over bit diameter; None: no limit
    depths : the only depths that may be drilled; empty: any

    0 is a value. Ranges are checked where it is used.

    >>> Capability(depth_tolerance=5e-5, cut_clearance=1e-4)
    Capability(depth_tolerance=50 um, cut_clearance=0.1 mm)
    """

    sides: Literal["top", "bottom", "both"] = "both"
    tolerance: Literal["worst", "rss"] = "worst"
    depth_tolerance: float = 0.0
    cut_clearance: float = 0.0
    residual_min: float = 0.0
    residual_target: float = 0.0
    bit_oversize: float = 0.0
    wall_clearance: float = 0.0
    aspect_ratio: float | None = None
    depths: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        lengths = ("depth_tolerance", "cut_clearance", "residual_min", "residual_target", "bit_oversize", "wall_clearance")
        fill(self, **{name: number(name, getattr(self, name)) for name in lengths})
        if self.aspect_ratio is not None:
            fill(self, aspect_ratio=number("aspect_ratio", self.aspect_ratio))
        if isinstance(self.depths, (str, bytes)) or not hasattr(self.depths, "__iter__"):
            raise TypeError(f"depths: must be a sequence of lengths, not {type(self.depths).__name__}")
        fill(self, depths=tuple(number(f"depths[{i}]", depth) for i, depth in enumerate(self.depths)))
        values = (
            SIDES.code("sides", self.sides),
            TOLERANCE.code("tolerance", self.tolerance),
            *(getattr(self, name) for name in lengths),
            self.aspect_ratio or 0.0,
            self.depths,
        )
        fill(self, _record=_core.record("capability", values))

    @staticmethod
    def of(values: tuple[Any, ...]) -> Capability:
        sides, tolerance, depth, cut, least, target, oversize, wall, aspect, depths = values
        return Capability(
            sides=SIDES.word(sides or _core.SIDE_BOTH),  # type: ignore[arg-type]
            tolerance=TOLERANCE.word(tolerance),  # type: ignore[arg-type]
            depth_tolerance=depth,
            cut_clearance=cut,
            residual_min=least,
            residual_target=target,
            bit_oversize=oversize,
            wall_clearance=wall,
            aspect_ratio=aspect or None,
            depths=depths,
        )


@dataclass(frozen=True, repr=False)
class Job(Frozen):
    """One via of a board and what it carries.

    Parameters
    ----------
    via : `Via`
    signal : `Signal`; None: carries none that matters, and is not judged
    criteria : `Criteria`, needed with a signal
    """

    via: Via
    signal: Signal | None = None
    criteria: Criteria | None = None

    def __post_init__(self) -> None:
        instance("via", self.via, Via, "a Via")
        instance("signal", self.signal, (Signal, type(None)), "a Signal or None")
        instance("criteria", self.criteria, (Criteria, type(None)), "a Criteria or None")
        values = (self.via._record, self.signal and self.signal._record, self.criteria and self.criteria._record)
        fill(self, _record=_core.record("job", values))


@dataclass(frozen=True, repr=False)
class DrillCut(Frozen):
    """What is done on one side of a via. Lengths in m.

    drilled: a back-drill is planned on this side. must_not_cut: layer; None where nothing is drilled. group: row of the
    drill table; None likewise. depth: target, from that side's outer copper face. depth_least, depth_most: any target
    between these would do. diameter: of the bit. residual: stub left, nominal. residual_least, residual_most: with the
    tolerances. limit: longest stub that the criteria allow here.
    """

    drilled: bool
    must_not_cut: str | None
    group: int | None
    depth: float
    depth_least: float
    depth_most: float
    diameter: float
    residual: float
    residual_least: float
    residual_most: float
    limit: float

    def __repr__(self) -> str:
        return super().__repr__() if self.drilled else "DrillCut(not drilled)"

    @staticmethod
    def of(stackup: Stackup, values: tuple[Any, ...]) -> DrillCut:
        drilled, layer, group, *rest = values
        if not drilled:
            return DrillCut(False, None, None, *rest)
        return DrillCut(True, stackup._name(layer), group, *rest)


@dataclass(frozen=True, repr=False)
class Decision(Frozen):
    """What is done about a via, and why.

    action, reason: see `Action`, `Reason`. reason_side, reason_layer: what the reason speaks of, or None. status: of the
    model; below 0 with Action.REFUSED. stub_count. top, bottom: `DrillCut`. stub_top, stub_bottom: nominal length
    before, m; 0: none. reason_value, reason_limit: the two numbers compared, in the reason's unit; else NaN. before:
    `Margin` as it is. after: as planned, with the longest residual; as before if not drilled.
    """

    action: Action
    reason: Reason
    reason_side: Side | None
    reason_layer: str | None
    status: Status
    stub_count: int
    top: DrillCut
    bottom: DrillCut
    stub_top: float
    stub_bottom: float
    reason_value: float
    reason_limit: float
    before: Margin
    after: Margin

    def __repr__(self) -> str:
        cuts = [
            f", {side} {show(cut.depth, 'm')} clear of {cut.must_not_cut}"
            for side, cut in (("top", self.top), ("bottom", self.bottom))
            if cut.drilled
        ]
        return f"Decision({self.action}: {self.reason}{''.join(cuts)})"


def _decision(stackup: Stackup, values: tuple[Any, ...]) -> Decision:
    action, reason, side, layer, status, count, top, bottom, *lengths, value, limit, before, after = values
    return Decision(
        action=Action(action),
        reason=Reason(reason),
        reason_side=SIDES.word(side) if side else None,  # type: ignore[arg-type]
        reason_layer=stackup._name(layer),
        status=Status(status),
        stub_count=count,
        top=DrillCut.of(stackup, top),
        bottom=DrillCut.of(stackup, bottom),
        stub_top=lengths[0],
        stub_bottom=lengths[1],
        reason_value=value,
        reason_limit=limit,
        before=Margin.of(before),
        after=Margin.of(after),
    )


@dataclass(frozen=True, repr=False)
class DrillGroup(Frozen):
    """A row of the drill table. Lengths in m.

    side, from_layer (outer copper layer the drill enters through), must_not_cut, hits, diameter (bit), depth (target),
    tolerance (plus or minus), residual_most (longest stub left by this row, with the tolerances).
    """

    side: Side
    from_layer: str
    must_not_cut: str
    hits: int
    diameter: float
    depth: float
    tolerance: float
    residual_most: float


def _group(stackup: Stackup, values: tuple[Any, ...]) -> DrillGroup:
    side, from_layer, must_not_cut, *rest = values
    names = stackup.layers
    return DrillGroup(SIDES.word(side), names[from_layer].name, names[must_not_cut].name, *rest)  # type: ignore[arg-type]


@dataclass(frozen=True, repr=False)
class PlanSummary(Frozen):
    """Totals of a plan.

    vias, and of these: not_judged, keep, drill_top, drill_bottom, drill_both, cannot, refused. outside_range: decided by
    a model outside its stated range. depths_top, depths_bottom: different drill depths, proved fewest for the vias
    drilled. groups: rows of the drill table. geometries: different (via, signal, criteria) among the jobs, each computed
    once. worst_notch_over_nyquist: least over the judged vias after the plan; inf: none. worst_added_loss_db: greatest
    over the judged vias after the plan.
    """

    vias: int
    not_judged: int
    keep: int
    drill_top: int
    drill_bottom: int
    drill_both: int
    cannot: int
    refused: int
    outside_range: int
    depths_top: int
    depths_bottom: int
    groups: int
    geometries: int
    worst_notch_over_nyquist: float
    worst_added_loss_db: float


class Plan(Immutable, SequenceABC):  # type: ignore[type-arg]
    """A plan: a `Decision` per job, in their order. Made by `plan` or `Board.plan`; immutable.

    ``len(plan)``, ``plan[i]``, slices and iteration give decisions.
    """

    __slots__ = ("_handle", "_stackup", "_again", "__weakref__")
    _handle: Any
    _stackup: Stackup
    _again: tuple[Callable[..., Plan], tuple[Any, ...]]

    def __init__(self, *args: Any, **kwargs: Any):
        raise TypeError("a Plan is made by plan() or Board.plan()")

    @classmethod
    def _of(cls, handle: Any, stackup: Stackup, again: Any) -> Plan:
        self = object.__new__(cls)
        fill(self, _handle=handle, _stackup=stackup, _again=again)
        return self

    @property
    def stackup(self) -> Stackup:
        """The stackup it was made for."""
        return self._stackup

    @property
    def groups(self) -> list[DrillGroup]:
        """Rows of the drill table."""
        return [_group(self._stackup, values) for values in _core.plan_groups(self._handle)]

    @property
    def totals(self) -> PlanSummary:
        """Totals of the plan."""
        return PlanSummary(*_core.plan_totals(self._handle))

    def reason(self, index: int) -> str:
        """One line of plain English that says why job number index is decided as it is; `IndexError`."""
        return _core.plan_reason(self._handle, self._index(index))

    def __len__(self) -> int:
        return _core.plan_count(self._handle)

    @overload
    def __getitem__(self, index: int) -> Decision: ...
    @overload
    def __getitem__(self, index: slice) -> list[Decision]: ...

    def __getitem__(self, index: int | slice) -> Decision | list[Decision]:
        if isinstance(index, slice):
            return [self[i] for i in range(*index.indices(len(self)))]
        return _decision(self._stackup, _core.plan_decision(self._handle, self._index(index)))

    def __iter__(self) -> Iterator[Decision]:
        for i in range(len(self)):
            yield self[i]

    def _index(self, index: int) -> int:
        length = len(self)
        place = range(length)[index] if -length <= index < length else None
        if place is None:
            raise IndexError(f"index = {index}: the plan has {length} vias")
        return place

    def __reduce__(self) -> Any:
        return self._again

    def __repr__(self) -> str:
        totals = self.totals
        parts = [f"{totals.vias} vias"]
        parts += [
            f"{getattr(totals, name)} {name.replace('_', ' ')}"
            for name in ("keep", "drill_top", "drill_bottom", "drill_both", "cannot", "refused", "not_judged")
            if getattr(totals, name)
        ]
        return f"Plan({', '.join(parts)})"


def plan(
    stackup: Stackup,
    jobs: Iterable[Job],
    capability: Capability,
    *,
    fidelity: Fidelity = "default",
    z_ref: float = 50.0,
    annuli: int | None = None,
) -> Plan:
    """Plans a board.

    Parameters
    ----------
    stackup : `Stackup` that all vias are on
    jobs : sequence of `Job`
    capability : `Capability` of the fabricator
    fidelity, z_ref, annuli : as `Model`

    Vias in error do not stop it: they come out as Action.REFUSED. A via that meets its criteria is kept. Otherwise the
    one drill that makes it pass is taken, the shorter cut first; then both. Per side the fewest depths that serve all
    vias are found; each depth then moves as near to the residuals aimed at as its vias allow.

    Raises `ArgumentError` for what concerns all vias. Results are estimates from a model: confirm drill depths,
    tolerances and clearances with the fabricator.
    """
    instance("stackup", stackup, Stackup, "a Stackup")
    instance("capability", capability, Capability, "a Capability")
    items = tuple(jobs)
    for i, job in enumerate(items):
        instance(f"jobs[{i}]", job, Job, "a Job")
        if job.via.stackup is not stackup and job.via.stackup != stackup:
            raise GeometryError(f"jobs[{i}]: its via is on another stackup", _core.E_GEOMETRY, "jobs", i)
    records = tuple(job._record for job in items)
    handle = _core.plan_create(stackup._handle, records, capability._record, options(fidelity, z_ref, annuli))
    return Plan._of(handle, stackup, (_plan_again, (stackup, items, capability, fidelity, z_ref, annuli)))


def _plan_again(
    stackup: Stackup, jobs: Sequence[Job], capability: Capability, fidelity: Fidelity, z_ref: float,
    annuli: int | None = None,
) -> Plan:
    return plan(stackup, jobs, capability, fidelity=fidelity, z_ref=z_ref, annuli=annuli)
