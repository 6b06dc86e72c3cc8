"""Via-stub analysis for multilayer boards, in process.

On a multilayer board a fast signal changes layers through a plated barrel. Whatever is left of the barrel beyond the
layers where the signal enters and leaves is an open stub. This package says how long the stubs of a via are, where they
notch the channel, what they cost at a given symbol rate, whether to drill them back, from which side and how deep, and
does so for one via or a whole board.

    import libstub as ls

    board = ls.Stackup.load("board.xml")                    # or built layer by layer
    via = ls.Via(board, drill=ls.mil(10), pad=ls.mil(20), antipad=ls.mil(30),
                 connects=("TOP", "INT3"), returns=ls.Ring(4, ls.mil(40)))
    link = ls.Signal(baud=ls.gbd(53.125), levels=4)
    criteria = ls.Criteria(notch_over_nyquist=2.0, added_loss_db=0.3)

    via.stubs                                               # [Stub(bottom, 1.41 mm below INT3)]
    m = via.model()                                         # compiled once, then microseconds a question
    m.dk_effective, m.notches(up_to=ls.ghz(67))
    m.margin(link, criteria)
    ls.longest_stub(via, link, criteria)                    # inverse question
    m.s21(np.linspace(1e9, 67e9, 2000))                     # NumPy in, NumPy out

The whole via with its traces is a network; networks are arrays of shape (n, p, p), row: port the wave comes out of:

    line = ls.Stripline(width=ls.um(113), height_below=ls.um(100), height_above=ls.um(100), dielectric_below=core)
    t = via.transition([ls.CoaxPort("TOP"), ls.TracePort("INT3", trace=line)])
    s = t.s(f)                                              # complex128, as scikit-rf takes it, with t.reference
    ls.touchstone_save("via.s2p", f, s, reference=t.reference)
    ls.cascade(ls.Touchstone.load("channel.s2p").data, ls.renormalise(s, t.reference, 50))
    ls.find_notches(f, s[:, 1, 0])                          # and fits of what is measured

Units are SI throughout (metre, hertz, ohm, henry, farad, second; Dk is relative); `units` converts. Diameters, not
radii. Depths are measured downwards from the outer face of the top copper layer. Layers are given by name or by index
and come back by name. Objects are frozen: make another one instead of changing one. They pickle by being made again.
Objects may be used by any number of threads at once; long calls release the GIL.

Arrays go in as anything NumPy reads, C-contiguous float64 without a copy, and come out as NumPy arrays. Without NumPy
they go in as sequences or one-dimensional buffers and come out as array.array and ComplexArray.

What fails raises a `LibstubError` with the library's message; a result outside the stated range of the model comes with
one `RangeWarning` per call. Results are estimates from a model: confirm drill depths, tolerances and clearances with
the fabricator; verify critical links by measurement or full-wave simulation; safety-related equipment follows its own
codes and licensed practice.
"""

from __future__ import annotations

from . import _core, units
from ._batch import (
    FirstNotches, Margins, StubLimits, first_notch_batch, longest_stub, longest_stub_batch, margin_batch,
)
from ._board import Board, Hole, Notice, Rules, RulesSignal
from ._core import ComplexArray
from ._criteria import Criteria, Limit, Margin, Signal, StubLimit, SymbolRateLimit
from ._errors import (
    ArgumentError, BatchError, FormatError, GeometryError, LibstubError, NoSuchError, RangeWarning, ReadError,
    UnsupportedError, WriteError,
)
from ._formulas import (
    Coax, TwinRod, coax, delay_dk, handbook_capacitance, handbook_inductance, loaded_stub_frequency, notch_floor,
    plate_capacitance, quarter_wave_dk, quarter_wave_frequency, quarter_wave_length, return_inductance,
    rule_of_thumb_length, skin_depth, stub_skirt, twin_rod,
)
from ._frozen import Status
from ._material import Conductor, Dielectric, Permittivity
from ._measure import (
    Estimate, Fit, FoundNotches, MeasuredNotch, Quality, find_notches, fit_coupons, fit_effective_dk, fit_in_plane_dk, fit_length,
)
from ._model import ALL_STUBS, Model, Notch, StubLine
from ._network import (
    Causality, LossDeviation, MixedMode, cascade, causality, convert, deembed, insertion_loss_deviation, passivity, port_map,
    reciprocity, renormalise, shunt, step_response, tdr, to_mixed, to_single,
)
from ._plan import Action, Capability, Decision, DrillCut, DrillGroup, Job, Plan, PlanSummary, Reason, plan
from ._stackup import Depth, Interval, Layer, Stackup
from ._touchstone import Touchstone, TouchstoneRow, touchstone_save, touchstone_write
from ._trace import Microstrip, Stripline, TraceLine
from ._transition import CoaxPort, TracePort, Transition
from ._via import BackDrill, Edges, Pair, Pin, Ring, Stub, Via, Vias, Wall
from .units import ff, gbd, gbps, ghz, inch, mbd, mhz, mil, mm, nh, ns, pf, ph, ps, um

__version__: str = _core.version
model_revision: int = _core.model_revision

__all__ = [
    "ALL_STUBS", "Action", "ArgumentError", "BackDrill", "BatchError", "Board", "Capability", "Causality", "Coax",
    "CoaxPort", "ComplexArray", "Conductor", "Criteria", "Decision", "Depth", "Dielectric", "DrillCut", "DrillGroup",
    "Edges", "Estimate", "FirstNotches", "Fit", "FormatError", "FoundNotches", "GeometryError", "Hole", "Interval",
    "Job", "Layer", "LibstubError", "Limit", "LossDeviation", "Margin", "Margins", "MeasuredNotch", "Microstrip",
    "MixedMode", "Model", "NoSuchError", "Notch", "Notice", "Pair", "Permittivity", "Pin", "Plan", "PlanSummary",
    "Quality", "RangeWarning", "ReadError", "Reason", "Ring", "Rules", "RulesSignal", "Signal", "Stackup", "Status",
    "Stripline", "Stub", "StubLimit", "StubLimits", "StubLine", "SymbolRateLimit", "Touchstone", "TouchstoneRow",
    "TraceLine", "TracePort", "Transition", "TwinRod", "UnsupportedError", "Via", "Vias", "Wall", "WriteError",
    "cascade", "causality", "coax", "convert", "deembed", "delay_dk", "ff", "find_notches", "first_notch_batch",
    "fit_coupons", "fit_effective_dk", "fit_in_plane_dk", "fit_length", "gbd", "gbps", "ghz", "handbook_capacitance",
    "handbook_inductance", "inch", "insertion_loss_deviation", "loaded_stub_frequency", "longest_stub",
    "longest_stub_batch", "margin_batch", "mbd", "mhz", "mil", "mm", "model_revision", "nh", "notch_floor", "ns",
    "passivity", "pf", "ph", "plan", "plate_capacitance", "port_map", "ps", "quarter_wave_dk",
    "quarter_wave_frequency", "quarter_wave_length", "reciprocity", "renormalise", "return_inductance",
    "rule_of_thumb_length", "shunt", "skin_depth", "step_response", "stub_skirt", "tdr", "to_mixed", "to_single",
    "touchstone_save", "touchstone_write", "twin_rod", "um", "units",
]
