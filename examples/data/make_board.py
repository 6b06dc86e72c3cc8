#!/usr/bin/env python3
"""Writes demo_board.xml.gz: the Heron line card, a board of our own invention in IPC-2581 revision C.

Nothing in it is real: no firm, no product, no person, no part. It is drawn to give a back-drill planner
something of everything: 20 copper layers, about 2,100 plated holes, six link speeds, pairs, blind and buried
spans, press-fit pins, via-in-pad, planes drawn as positive and as negative artwork.

Python's standard library only, and always the same bytes:

    python3 make_board.py [demo_board.xml.gz]

The card, in millimetres. A switch chip U1 (1 mm pitch, 32 x 32 balls, dog-bones) stands in the middle. On each of
its four sides pairs leave from four depths, the outer ones on deep layers, the inner ones on shallow layers, so
that no trace crosses a place that will be drilled:

    west   press-fit backplane connectors J1..J3      east   front cages P1..P9, on both sides of the board
    north  a fabric chip U2 (via-in-pad)              south  a host processor U3 on the bottom side
"""
import gzip
import io
import math
import os
import random
import sys
from collections import defaultdict

SEED = 2581                        # of the only thing drawn by lot: where the ground stitching stands
SIZE = (300.0, 240.0)
CENTRE = (150.0, 120.0)            # of U1
TRACE, GAP = 0.10, 0.13            # of a pair
LEG = (TRACE + GAP) / 2            # a leg's distance from the middle of its pair
PITCH = 1.0                        # of the ball grids
COLUMNS = range(-4, 5)             # of pairs on a side of U1: 3 mm apart
DEPTHS = {1: 4, 3: 3, 5: 3, 7: 2}  # row of balls from the edge: columns -n..n carry a pair there

# ---- stackup: name, function, thickness, tolerance, Dk, loss tangent (of the resin on copper layers) ----

CORE, PREPREG, MIDDLE, MASK = (3.35, 0.0035), (3.15, 0.0042), (3.95, 0.0130), (3.40, 0.0200)


def make_stackup():
    """The layers from top to bottom; 20 copper layers in two sub-laminates of ten."""
    names = ["TOP", "GND1", "IN1", "GND2", "IN2", "GND3", "IN3", "GND4", "PWR1", "IN4",
             "IN5", "PWR2", "GND5", "IN6", "GND6", "IN7", "GND7", "IN8", "GND8", "BOTTOM"]
    layers = [("SM_TOP", "SOLDERMASK", 0.020, 0.005, MASK)]
    for i, name in enumerate(names):
        outer = name in ("TOP", "BOTTOM")
        plane = name.startswith(("GND", "PWR"))
        below = MIDDLE if 7 <= i <= 11 else CORE if i % 2 else PREPREG
        above = MIDDLE if 8 <= i <= 12 else PREPREG if i % 2 else CORE
        resin = above if i else below
        thickness = 0.048 if outer else 0.030 if plane else 0.015
        function = "PLANE" if plane else "CONDUCTOR"
        layers.append((name, function, thickness, 0.008 if outer else 0.003, resin))
        if not name == "BOTTOM":
            core = i % 2 == 1
            h = 0.100 if core else 0.115
            h = 0.140 if i == 9 else h       # the bond between the two sub-laminates
            layers.append(("DIEL%d" % (i + 1), "DIELCORE" if core else "DIELPREG", h,
                           0.008 if core else 0.0115, below))
    layers.append(("SM_BOT", "SOLDERMASK", 0.020, 0.005, MASK))
    return names, layers


COPPER, STACKUP = make_stackup()
NEGATIVE = [n for n in COPPER if n.startswith("GND")]
SPANS = {"THROUGH": ("TOP", "BOTTOM"), "BLIND_TOP": ("TOP", "IN4"),
         "BLIND_BOT": ("IN5", "BOTTOM"), "BURIED": ("IN5", "IN8")}
# pad stacks: drill, pad, antipad, span
STACKS = {
    "VIA_25": (0.25, 0.50, 0.75, "THROUGH"),
    "VIA_20": (0.20, 0.45, 0.80, "THROUGH"),        # for the fastest links: antipads opened a little
    "VIA_30": (0.30, 0.55, 0.80, "THROUGH"),        # stitching
    "BLIND_TOP_20": (0.20, 0.45, 0.70, "BLIND_TOP"),
    "BLIND_BOT_20": (0.20, 0.45, 0.70, "BLIND_BOT"),
    "BURIED_20": (0.20, 0.45, 0.70, "BURIED"),
    "PRESSFIT_40": (0.40, 0.65, 0.90, "THROUGH"),
}
CORE_AREA = (138.0, 108.0, 162.0, 132.0)            # where the power planes carry VDD_CORE


class Hole:
    def __init__(self, x, y, net, stack, joins=(), pin=None):
        self.x, self.y, self.net, self.stack, self.pin = x, y, net, stack, pin
        self.joins = set(joins)                     # copper layers with a functional pad
        start, end = SPANS[STACKS[stack][3]]
        self.span = range(COPPER.index(start), COPPER.index(end) + 1)
        self.ends = {start, end}


class Board:
    def __init__(self):
        self.holes = []
        self.traces = []                            # layer, net, points
        self.lands = []                             # layer, net, x, y, pin

    def hole(self, x, y, net, stack, joins=(), pin=None):
        self.holes.append(Hole(x, y, net, stack, joins, pin))
        return self.holes[-1]

    def trace(self, layer, net, *points):
        self.traces.append((layer, net, points))

    def land(self, layer, net, x, y, pin):
        self.lands.append((layer, net, x, y, pin))


class Side:
    """One side of U1: u points outwards from the chip's centre, v along its edge."""

    def __init__(self, u, v):
        self.u, self.v = u, v

    def xy(self, u, v):
        return (CENTRE[0] + u * self.u[0] + v * self.v[0], CENTRE[1] + u * self.u[1] + v * self.v[1])


SIDES = {"W": Side((-1, 0), (0, 1)), "E": Side((1, 0), (0, 1)), "N": Side((0, 1), (1, 0)), "S": Side((0, -1), (1, 0))}

# What leaves on each side: by row of balls the link, the layer, the pad stack at U1 and at the far end.
LINKS = {
    "W": {1: ("BP53", "IN8", "VIA_25", "PRESSFIT_40"), 3: ("BP25", "IN6", "VIA_25", "PRESSFIT_40"),
          5: ("BP25", "IN3", "VIA_25", "PRESSFIT_40"), 7: ("BP53", "IN1", "VIA_25", "PRESSFIT_40")},
    "E": {1: ("FP106", "IN7", "VIA_20", "VIA_20"), 3: ("FP53", "IN3", "BLIND_TOP_20", "VIA_25"),
          5: ("FP53", "IN2", "VIA_25", "VIA_25"), 7: ("FP106", "IN1", "VIA_20", "VIA_20")},
    "N": {1: ("FAB26", "IN8", "VIA_25", "VIA_25"), 3: ("FAB26", "IN6", "VIA_25", "VIA_25"),
          5: ("FAB53", "IN3", "VIA_25", "VIA_25"), 7: ("FAB53", "IN1", "VIA_25", "VIA_25")},
    "S": {1: ("HOST32", "IN8", "VIA_25", "BLIND_BOT_20"), 3: ("HOST32", "IN6", "VIA_25", "VIA_25"),
          5: ("MGT10", "IN2", "VIA_25", "VIA_25"), 7: ("MGT10", "IN1", "VIA_25", "VIA_25")},
}
# Far ends: distance of the nearest row, row pitch, pin pitch, column pitch, side the part stands on
FAR = {"W": (110.0, 1.3, 1.3, 3.9), "E": (105.0, 1.0, 1.0, 8.0), "N": (60.0, 1.0, 1.0, 3.0), "S": (60.0, 1.0, 1.0, 3.0)}
HOP_LAYER = {("N", 5): ("IN7", "VIA_25"), ("S", 3): ("IN7", "BURIED_20")}   # pairs that change layer half way
SHORT_BLIND = {("E", 7, -1), ("E", 7, 1)}           # somebody chose a blind via here: it cannot be drilled
UNROUTED = {("E", 5, 3)}                            # not routed yet: a via that connects on one layer only


def pair_nets(side, depth, column):
    link = LINKS[side][depth][0]
    stem = "%s_%s%d%02d" % (link, side, depth, column + 5)
    return stem + "_P", stem + "_N"


def jog_out(u, v, middle, leg, reach, sign):
    """From a via at (u, v) at 45 degrees to a leg beside the middle of its pair, then straight to `reach`."""
    target = middle + leg
    return [(u, v), (u + sign * abs(target - v), target), (reach, target)]


def far_side(side, column):
    """Layer of the part at the far end, where its pads are."""
    if side == "S":
        return "BOTTOM"
    return "BOTTOM" if side == "E" and column % 2 else "TOP"


def add_pairs(board):
    for side, s in SIDES.items():
        far_u, row_pitch, pin_pitch, column_pitch = FAR[side]
        for depth, n in DEPTHS.items():
            link, layer, near_stack, far_stack = LINKS[side][depth]
            for column in range(-n, n + 1):
                nets = pair_nets(side, depth, column)
                stack = "BLIND_TOP_20" if (side, depth, column) in SHORT_BLIND else near_stack
                routed = (side, depth, column) not in UNROUTED
                middle, u = 3.0 * column, 15.5 - depth
                far = (far_u + row_pitch * (depth - 1), column * column_pitch)
                for net, sign in zip(nets, (-1, 1)):
                    x, y = s.xy(u, middle + sign * PITCH / 2)
                    board.hole(x, y, net, stack, {"TOP", layer} if routed else {"TOP"})
                    dog_bone(board, net, x, y)
                if routed:
                    last = add_far_end(board, side, column, far, nets, depth)
                    route(board, side, depth, column, nets, (u, middle), far, last)


def dog_bone(board, net, x, y):
    """The ball that a via of U1 belongs to, half a pitch away."""
    bx, by = x + PITCH / 2, y + PITCH / 2
    board.trace("TOP", net, (x, y), (bx, by))
    board.land("TOP", net, bx, by, ("U1", ball_name(bx, by)))


def ball_name(x, y):
    row = int(round(x - CENTRE[0])) + 15
    return "%s%s%d" % ("A" if row >= 20 else "", "ABCDEFGHJKLMNPRTUVWY"[row % 20], int(round(y - CENTRE[1])) + 16)


def add_far_end(board, side, column, far, nets, depth):
    """The two holes at the far end; returns the layer on which the pair arrives there."""
    layer = HOP_LAYER.get((side, depth), (LINKS[side][depth][1],))[0]
    stack, part = LINKS[side][depth][3], far_side(side, column)
    pin_pitch = FAR[side][2]
    for net, sign in zip(nets, (-1, 1)):
        x, y = SIDES[side].xy(far[0], far[1] + sign * pin_pitch / 2)
        name = "%d%s" % (10 * depth + column + 5, "P" if sign < 0 else "N")
        if side == "W":
            board.hole(x, y, net, stack, {"TOP", layer}, ("J%d" % ((column + 4) // 3 + 1), name))
        elif side == "E":
            board.hole(x, y, net, stack, {part, layer})
            px, py = SIDES[side].xy(far[0] + 0.45, far[1] + sign * (pin_pitch / 2 + 0.45))
            board.trace(part, net, (x, y), (px, py))
            board.land(part, net, px, py, ("P%d" % (column + 5), name))
        else:
            joins = {part, layer}
            if depth == 5 and side == "S":
                joins.add("TOP")                    # a test pad on the other side: three layers, no stub
                px, py = SIDES[side].xy(far[0] + 0.40, far[1] + sign * 0.90)
                board.trace("TOP", net, (x, y), (px, py))
                board.land("TOP", net, px, py, ("TP%d" % (column + 5), name))
            board.hole(x, y, net, stack, joins)
            board.land(part, net, x, y, ("U2" if side == "N" else "U3", name))
    return layer


def route(board, side, depth, column, nets, near, far, last):
    s, layer = SIDES[side], LINKS[side][depth][1]
    pin_pitch = FAR[side][2]
    hop = HOP_LAYER.get((side, depth))
    for net, sign in zip(nets, (-1, 1)):
        start = jog_out(near[0], near[1] + sign * PITCH / 2, near[1], sign * LEG, 17.5, 1)
        end = jog_out(far[0], far[1] + sign * pin_pitch / 2, far[1], sign * LEG, FAR[side][0] - 3.0, -1)[::-1]
        if hop is None:
            board.trace(layer, net, *[s.xy(*p) for p in start + end])
            continue
        # half way, in the gap between two columns, through a pair of vias
        u, v = 36.0, 3.0 * column + 1.5
        via = (u, v + sign * PITCH / 2)
        into = jog_out(u, via[1], v, sign * LEG, u - 3.0, -1)[::-1]
        out = jog_out(u, via[1], v, sign * LEG, u + 3.0, 1)
        board.trace(layer, net, *[s.xy(*p) for p in start + into])
        board.trace(hop[0], net, *[s.xy(*p) for p in out + end])
        board.hole(*s.xy(*via), net, hop[1], {layer, hop[0]})
        if hop[1] != "BURIED_20":
            for du in (-1.0, 1.0):
                board.hole(*s.xy(u + du, via[1]), "GND", "VIA_25", NEGATIVE + ["TOP", "BOTTOM"])


def add_far_grounds(board):
    """Ground pins round every pair at the far ends: beside it and in the rows before and behind."""
    for side, s in SIDES.items():
        far_u, row_pitch, pin_pitch, column_pitch = FAR[side]
        stack = "PRESSFIT_40" if side == "W" else "VIA_25"
        taken = set()
        for depth, n in DEPTHS.items():
            for column in range(-n, n + 1):
                if (side, depth, column) in UNROUTED:
                    continue
                u, v = far_u + row_pitch * (depth - 1), column * column_pitch
                for du, dv in [(0, -1.5), (0, 1.5), (-1, -0.5), (-1, 0.5), (1, -0.5), (1, 0.5)]:
                    spot = (round(u + du * row_pitch, 4), round(v + dv * pin_pitch, 4))
                    if spot not in taken:
                        taken.add(spot)
                        x, y = s.xy(*spot)
                        pin = ("J%d" % ((column + 4) // 3 + 1), "G%d" % len(taken)) if side == "W" else None
                        board.hole(x, y, "GND", stack, NEGATIVE + ["TOP", "BOTTOM"], pin)


def add_grid(board):
    """All other balls of U1, and the power balls of U2: grounds round the pairs, power in the middle."""
    taken = {(round(h.x, 3), round(h.y, 3)) for h in board.holes}
    for i in range(32):
        for k in range(32):
            x, y = CENTRE[0] + i - 15.5, CENTRE[1] + k - 15.5
            if (round(x, 3), round(y, 3)) in taken:
                continue
            depth = min(i, k, 31 - i, 31 - k)
            core = depth >= 9 and (i + k) % 2
            corner = depth < 9 and abs(i - 15.5) == abs(k - 15.5)
            net = "VDD_CORE" if core else "VDD_IO" if corner else "GND"
            debug = {(9, 23): "DBG_A", (13, 23): "DBG_A"}.get((i, k))      # see add_debug
            power = {"VDD_CORE": ["PWR1", "PWR2"], "VDD_IO": ["PWR1"], "GND": NEGATIVE}[net]
            board.hole(x, y, debug or net, "VIA_25", ["TOP", "IN8"] if debug else power + ["TOP"])
            dog_bone(board, debug or net, x, y)
    for i in range(28):
        for k in range(5):
            x, y = SIDES["N"].xy(70.0 + k, i - 13.5)
            net = "VDD_IO" if (i + k) % 2 else "GND"
            board.hole(x, y, net, "VIA_25", (["PWR1"] if (i + k) % 2 else NEGATIVE) + ["TOP"])
            board.land("TOP", net, x, y, ("U2", "X%d" % (28 * k + i)))


def add_debug(board):
    """A slow net laid close to places that want drilling: the drill bit would come too near to its trace."""
    y = CENTRE[1] + 8.5 - 0.36
    west, east = CENTRE[0] - 6.5, CENTRE[0] - 2.5
    board.trace("IN8", "DBG_A", (west, y - 0.64), (west, y), (east, y), (east, y - 0.64))


def add_control(board):
    """A slow bus in a corner: header J6 to test vias on the bottom; no rule gives it a signal."""
    for i in range(16):
        net, y = "CTL_%02d" % i, 14.0 + 2.0 * i
        layer = "IN4" if i % 2 else "IN5"
        board.hole(20.0, y, net, "PRESSFIT_40", {"TOP", layer}, ("J6", "%d" % (i + 1)))
        board.hole(80.0, y, net, "VIA_30", {layer, "BOTTOM"})
        board.trace(layer, net, (20.0, y), (80.0, y))
        board.land("BOTTOM", net, 80.0, y, ("TP%d" % (i + 20), "1"))


def distance_to_segment(p, a, b):
    dx, dy = b[0] - a[0], b[1] - a[1]
    t = 0.0 if dx == dy == 0 else max(0.0, min(1.0, ((p[0] - a[0]) * dx + (p[1] - a[1]) * dy) / (dx * dx + dy * dy)))
    return math.hypot(p[0] - a[0] - t * dx, p[1] - a[1] - t * dy)


def nearest(board, x, y, net, span=range(20)):
    """Least distance from a place to the middle of a trace of another net, and to another hole's axis."""
    near = 3.0                       # farther is far enough
    trace = min((distance_to_segment((x, y), a, b) for layer, other, points in board.traces
                 if other != net and COPPER.index(layer) in span for a, b in zip(points, points[1:])
                 if min(a[0], b[0]) - near < x < max(a[0], b[0]) + near
                 and min(a[1], b[1]) - near < y < max(a[1], b[1]) + near), default=near)
    hole = min((math.hypot(x - h.x, y - h.y) for h in board.holes
                if abs(x - h.x) < near and abs(y - h.y) < near and (h.x, h.y) != (x, y)), default=near)
    return trace, hole


def add_stitching(board):
    rng = random.Random(SEED)
    wanted = 160
    while wanted:
        x, y = round(5 + rng.random() * (SIZE[0] - 10), 1), round(5 + rng.random() * (SIZE[1] - 10), 1)
        trace, hole = nearest(board, x, y, "GND")
        if trace > 0.7 and hole > 2.5:
            board.hole(x, y, "GND", "VIA_30", NEGATIVE + ["TOP", "BOTTOM"])
            wanted -= 1


def check_clearance(board):
    """Nothing touches: the drawing obeys the rules that it asks a planner to obey."""
    for h in board.holes:
        trace, hole = nearest(board, h.x, h.y, h.net, h.span)
        drill, pad = STACKS[h.stack][:2]
        assert trace >= drill / 2 + TRACE / 2 + 0.125, (h.net, h.x, h.y, "trace", trace)
        assert hole >= 0.9, (h.net, h.x, h.y, "hole", hole)


# ---- writing -------------------------------------------------------------------------------------------

def num(v):
    return ("%.4f" % v).rstrip("0").rstrip(".")


class Xml:
    def __init__(self):
        self.out, self.depth = io.StringIO(), 0

    def line(self, text):
        self.out.write("  " * self.depth + text + "\n")

    def open(self, text):
        self.line("<%s>" % text)
        self.depth += 1

    def close(self, *names):
        for name in names:
            self.depth -= 1
            self.line("</%s>" % name)


def header(w, shapes):
    w.open('Content roleRef="Owner"')
    w.line('<FunctionMode mode="FABRICATION"/>')
    w.line('<StepRef name="HERON_LINE_CARD"/>')
    for name in [layer[0] for layer in STACKUP] + ["DRILL_" + s for s in SPANS] + ["TOOLING"]:
        w.line('<LayerRef name="%s"/>' % name)
    w.open('DictionaryLineDesc units="MILLIMETER"')
    w.line('<EntryLineDesc id="W100"><LineDesc lineEnd="ROUND" lineWidth="%s"/></EntryLineDesc>' % num(TRACE))
    w.close("DictionaryLineDesc")
    w.open('DictionaryFillDesc units="MILLIMETER"')
    w.line('<EntryFillDesc id="SOLID"><FillDesc fillProperty="FILL"/></EntryFillDesc>')
    w.close("DictionaryFillDesc")
    w.open('DictionaryStandard units="MILLIMETER"')
    for d in sorted(shapes):
        w.line('<EntryStandard id="%s"><Circle diameter="%s"><FillDescRef id="SOLID"/></Circle></EntryStandard>'
               % (circle(d), num(d)))
    w.close("DictionaryStandard")
    w.open('DictionaryUser units="MILLIMETER"')
    w.open('EntryUser id="FULL_CONTACT"')
    w.line('<UserSpecial><Circle diameter="0.05"><FillDescRef id="SOLID"/></Circle></UserSpecial>')
    w.close("EntryUser", "DictionaryUser", "Content")
    w.open("LogisticHeader")
    w.line('<Role id="Owner" roleFunction="SENDER"/>')
    w.line('<Enterprise id="INVENTED" code="INVENTED"/>')
    w.line('<Person name="nobody" enterpriseRef="INVENTED" roleRef="Owner"/>')
    w.close("LogisticHeader")
    when = "2020-01-01T00:00:00"
    w.open('HistoryRecord number="1" origination="%s" software="make_board.py" lastChange="%s"' % (when, when))
    w.open('FileRevision fileRevisionId="1" comment="An invented board: no firm, product, person or part is real"')
    w.open('SoftwarePackage name="make_board.py" revision="1" vendor="none"')
    w.line('<Certification certificationStatus="SELFTEST"/>')
    w.close("SoftwarePackage", "FileRevision", "HistoryRecord")


def circle(diameter):
    return "C%d" % round(diameter * 1000)


def specs_and_stackup(w):
    w.open('CadHeader units="MILLIMETER"')
    for name, function, _, _, (dk, loss) in STACKUP:
        w.open('Spec name="SPEC_%s"' % name)
        metal = function in ("CONDUCTOR", "PLANE")
        w.line('<General type="MATERIAL"><Property text="%s"/></General>' % ("COPPER" if metal else "INVENTED_RESIN"))
        if metal:
            w.line('<Conductor type="CONDUCTIVITY"><Property value="580000" unit="MHO/CM"/></Conductor>')
        w.line('<Dielectric type="DIELECTRIC_CONSTANT"><Property value="%s"/></Dielectric>' % num(dk))
        w.line('<Dielectric type="LOSS_TANGENT"><Property value="%s"/></Dielectric>' % num(loss))
        w.close("Spec")
    w.close("CadHeader")
    w.open("CadData")
    for name, function, _, _, _ in STACKUP:
        side = ("TOP" if name.endswith("TOP") else "BOTTOM" if name in ("BOTTOM", "SM_BOT") else "INTERNAL")
        w.line('<Layer name="%s" layerFunction="%s" side="%s" polarity="%s"/>'
               % (name, function, side, "NEGATIVE" if name in NEGATIVE else "POSITIVE"))
    for span, (start, end) in list(SPANS.items()) + [("", ("TOP", "BOTTOM"))]:
        side = {"THROUGH": "ALL", "BLIND_TOP": "TOP", "BLIND_BOT": "BOTTOM", "BURIED": "INTERNAL", "": "ALL"}[span]
        w.open('Layer name="%s" layerFunction="DRILL" side="%s" polarity="POSITIVE"'
               % ("DRILL_" + span if span else "TOOLING", side))
        w.line('<Span fromLayer="%s" toLayer="%s"/>' % (start, end))
        w.close("Layer")
    total, tol = sum(layer[2] for layer in STACKUP), sum(layer[3] for layer in STACKUP)
    w.open('Stackup name="HERON_20" overallThickness="%s" tolPlus="%s" tolMinus="%s" whereMeasured="MASK"'
           % (num(total), num(tol), num(tol)))
    w.open('StackupGroup name="HERON_20_ALL" thickness="%s" tolPlus="%s" tolMinus="%s"'
           % (num(total), num(tol), num(tol)))
    for i, (name, _, thickness, tolerance, _) in enumerate(STACKUP, 1):
        w.open('StackupLayer layerOrGroupRef="%s" thickness="%s" tolPlus="%s" tolMinus="%s" sequence="%d"'
               % (name, num(thickness), num(tolerance), num(tolerance), i))
        w.line('<SpecRef id="SPEC_%s"/>' % name)
        w.close("StackupLayer")
    w.close("StackupGroup", "Stackup")


def polygon(w, tag, corners):
    w.open(tag)
    w.line('<PolyBegin x="%s" y="%s"/>' % tuple(map(num, corners[0])))
    for c in corners[1:] + corners[:1]:
        w.line('<PolyStepSegment x="%s" y="%s"/>' % tuple(map(num, c)))
    w.close(tag)


def rectangle(x0, y0, x1, y1):
    return [(x0, y0), (x1, y0), (x1, y1), (x0, y1)]


def round_cutout(w, x, y, diameter):
    r = diameter / 2
    w.open("Cutout")
    w.line('<PolyBegin x="%s" y="%s"/>' % (num(x + r), num(y)))
    for end in (x - r, x + r):
        w.line('<PolyStepCurve x="%s" y="%s" centerX="%s" centerY="%s" clockwise="true"/>'
               % (num(end), num(y), num(x), num(y)))
    w.close("Cutout")


def positive_plane(w, board, layer):
    """Two areas, each with a round cut-out at every barrel of another net."""
    outer = "VDD_IO" if layer == "PWR1" else "VDD_AUX"
    index = COPPER.index(layer)
    x0, y0, x1, y1 = CORE_AREA
    for net, inside in ((outer, False), ("VDD_CORE", True)):
        w.open('Set net="%s"' % net)
        w.open("Features")
        w.line('<Location x="0" y="0"/>')
        w.open("Contour")
        polygon(w, "Polygon", rectangle(*CORE_AREA) if inside else rectangle(1, 1, SIZE[0] - 1, SIZE[1] - 1))
        if not inside:
            polygon(w, "Cutout", rectangle(x0 - 0.3, y0 - 0.3, x1 + 0.3, y1 + 0.3))
        for h in board.holes:
            if index in h.span and h.net != net and (x0 < h.x < x1 and y0 < h.y < y1) == inside:
                round_cutout(w, h.x, h.y, STACKS[h.stack][2])
        w.close("Contour", "Features", "Set")


def pads_of(board, layer):
    """By net and kind: the pads, clearances and contacts of the barrels on a layer."""
    index, sets = COPPER.index(layer), defaultdict(list)
    for h in board.holes:
        if index not in h.span:
            continue
        pad, antipad = STACKS[h.stack][1:3]
        usage = None if h.pin else "VIA"
        joined = layer in h.joins or layer in h.ends
        if layer in NEGATIVE:
            shape = "FULL_CONTACT" if layer in h.joins else circle(antipad)
        elif joined or h.pin:                # press-fit pins keep their pads on every layer
            shape = circle(pad)
        else:
            continue
        if layer in ("PWR1", "PWR2") and not joined:
            continue
        sets[h.net, usage].append((h.x, h.y, shape, h.pin))
    for land_layer, net, x, y, pin in board.lands:
        if land_layer == layer:
            sets[net, "TERMINATION"].append((x, y, circle(0.5), pin))
    return sets


def layer_features(w, board, layer):
    w.open('LayerFeature layerRef="%s"' % layer)
    if layer.startswith("PWR"):
        positive_plane(w, board, layer)
    for trace_layer, net, points in board.traces:
        if trace_layer != layer:
            continue
        w.open('Set net="%s"' % net)
        w.open("Features")
        w.line('<Location x="0" y="0"/>')
        w.open("Polyline")
        w.line('<PolyBegin x="%s" y="%s"/>' % tuple(map(num, points[0])))
        for p in points[1:]:
            w.line('<PolyStepSegment x="%s" y="%s"/>' % tuple(map(num, p)))
        w.line('<LineDescRef id="W100"/>')
        w.close("Polyline", "Features", "Set")
    for (net, usage), pads in sorted(pads_of(board, layer).items(), key=lambda item: (item[0][0], item[0][1] or "")):
        plate = ' plate="true"' if usage != "TERMINATION" else ""
        w.open('Set net="%s" testPoint="false"%s%s' % (net, plate, ' padUsage="%s"' % usage if usage else ""))
        for x, y, shape, pin in pads:
            ref = "UserPrimitiveRef" if shape == "FULL_CONTACT" else "StandardPrimitiveRef"
            pin_ref = '<PinRef pin="%s" componentRef="%s"/>' % (pin[1], pin[0]) if pin else ""
            w.line('<Pad><Location x="%s" y="%s"/><%s id="%s"/>%s</Pad>' % (num(x), num(y), ref, shape, pin_ref))
        w.close("Set")
    w.close("LayerFeature")


def hole(w, name, diameter, plating, x, y):
    w.line('<Hole name="%s" diameter="%s" platingStatus="%s" plusTol="0.05" minusTol="0.05" x="%s" y="%s"/>'
           % (name, num(diameter), plating, num(x), num(y)))


def drill_features(w, board, span):
    w.open('LayerFeature layerRef="DRILL_%s"' % span)
    number = 0
    groups = defaultdict(list)
    for h in board.holes:
        if STACKS[h.stack][3] == span:
            # a set for every hole of a signal; grounds and supplies share one
            shared = h.net == "GND" or h.net.startswith("VDD")
            groups[(h.net, h.stack) if shared else (h.net, h.stack, h.x, h.y)].append(h)
    for key, holes in groups.items():
        w.open('Set net="%s" geometry="%s"' % key[:2])
        for h in holes:
            number += 1
            hole(w, "%s%d" % (span[0] + span[-1], number), STACKS[h.stack][0], "PLATED" if h.pin else "VIA", h.x, h.y)
        w.close("Set")
    w.close("LayerFeature")


def tooling(w):
    w.open('LayerFeature layerRef="TOOLING"')
    w.open('Set geometry="TOOLING_32"')
    for i, (x, y) in enumerate(rectangle(4, 4, SIZE[0] - 4, SIZE[1] - 4)):
        hole(w, "M%d" % (i + 1), 3.2, "NONPLATED", x, y)
    w.close("Set", "LayerFeature")


def write(board):
    w = Xml()
    w.line('<?xml version="1.0" encoding="UTF-8"?>')
    w.line("<!-- The Heron line card: a board of our own invention. No firm, person or part in it is real. -->")
    w.open('IPC-2581 revision="C" xmlns="http://webstds.ipc.org/2581"')
    header(w, {d for s in STACKS.values() for d in s[1:3]} | {0.5})
    w.open('Ecad name="Design"')
    specs_and_stackup(w)
    w.open('Step name="HERON_LINE_CARD"')
    w.line('<Datum x="0" y="0"/>')
    w.open("Profile")
    polygon(w, "Polygon", rectangle(0, 0, *SIZE))
    w.close("Profile")
    for layer in COPPER:
        layer_features(w, board, layer)
    for span in SPANS:
        drill_features(w, board, span)
    tooling(w)
    w.close("Step", "CadData", "Ecad", "IPC-2581")
    return w.out.getvalue().encode("utf-8")


def make_board():
    board = Board()
    add_pairs(board)
    add_far_grounds(board)
    add_grid(board)
    add_debug(board)
    add_control(board)
    add_stitching(board)
    check_clearance(board)
    return board


def main(arguments):
    here = os.path.dirname(os.path.abspath(__file__))
    path = arguments[0] if arguments else os.path.join(here, "demo_board.xml.gz")
    data = write(make_board())
    with open(path, "wb") as file, gzip.GzipFile("", "wb", 9, file, mtime=0) as packed:
        packed.write(data)
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
