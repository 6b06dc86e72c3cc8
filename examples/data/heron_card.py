"""The Heron line card, drawn: a board of our own invention, see make_board.py.

The card, in millimetres. A switch chip U1 (1 mm pitch, 32 x 32 balls, dog-bones) stands in the middle. On each of
its four sides pairs leave from four depths, the outer ones on deep layers, the inner ones on shallow layers, so
that no trace crosses a place that will be drilled:

    west   press-fit backplane connectors J1..J3      east   front cages P1..P9, on both sides of the board
    north  a fabric chip U2 (via-in-pad)              south  a host processor U3 on the bottom side
"""
import math
import random

SEED = 2581                        # of the only thing drawn by lot: where the ground stitching stands
SIZE = (300.0, 240.0)
CENTRE = (150.0, 120.0)            # of U1
TRACE, GAP = 0.10, 0.13            # of a pair
LEG = (TRACE + GAP) / 2            # a leg's distance from the middle of its pair
PITCH = 1.0                        # of the ball grids
DEPTHS = {1: 4, 3: 3, 5: 3, 7: 2}  # row of balls from the edge: columns -n..n, 3 mm apart, carry a pair there

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


# part: side, place
PARTS = {"U1": ("TOP", CENTRE), "U2": ("TOP", (150, 187)), "U3": ("BOTTOM", (150, 57)), "J6": ("TOP", (20, 29))}
PARTS.update({"J%d" % n: ("TOP", (36, 120 + 11.7 * (n - 2))) for n in (1, 2, 3)})
PARTS.update({"P%d" % n: ("TOP" if n % 2 else "BOTTOM", (258, 120 + 8 * (n - 5))) for n in range(1, 10)})


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
    "E": {1: ("FP106", "IN7", "VIA_20", "VIA_20"), 3: ("FP26", "IN3", "BLIND_TOP_20", "VIA_25"),
          5: ("FP53", "IN2", "VIA_25", "VIA_25"), 7: ("FP106", "IN1", "VIA_20", "VIA_20")},
    "N": {1: ("FAB26", "IN8", "VIA_25", "VIA_25"), 3: ("FAB26", "IN6", "VIA_25", "VIA_25"),
          5: ("FAB53", "IN3", "VIA_25", "VIA_25"), 7: ("FAB53", "IN1", "VIA_25", "VIA_25")},
    "S": {1: ("HOST32", "IN8", "VIA_25", "VIA_25"), 3: ("MGT10", "IN6", "VIA_25", "VIA_25"),
          5: ("HOST32", "IN2", "VIA_25", "VIA_25"), 7: ("MGT10", "IN1", "VIA_25", "VIA_25")},
}
# Far ends: distance of the nearest row, row pitch, pin pitch, column pitch
FAR = {"W": (110.0, 1.3, 1.3, 3.9), "E": (105.0, 1.0, 1.0, 8.0), "N": (60.0, 1.0, 1.0, 3.0), "S": (60.0, 1.0, 1.0, 3.0)}
HOP_LAYER = {("N", 5): ("IN7", "VIA_25"), ("S", 3): ("IN7", "BURIED_20")}   # pairs that change layer half way
# Somebody chose a blind via here, near U1 or at the far end: its stub cannot be reached by a drill.
NEAR_BLIND = {("E", 7, -1): "BLIND_TOP_20", ("E", 7, 1): "BLIND_TOP_20"}
FAR_BLIND = {("S", 1, -4): "BLIND_BOT_20", ("S", 1, 4): "BLIND_BOT_20"}
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


def far_place(side, depth, column):
    """Middle of a pair at the far end. Nearest are the rows whose drill leaves the other rows' traces alone: those of
    deep layers where the part is on top, of shallow ones where it is below and the drill comes from the top."""
    first, row_pitch, _, column_pitch = FAR[side]
    row = depth - 1 if far_side(side, column) == "TOP" else 7 - depth
    return first + row_pitch * row, column * column_pitch


def add_pairs(board):
    for side, s in SIDES.items():
        for depth, n in DEPTHS.items():
            layer, near_stack = LINKS[side][depth][1:3]
            for column in range(-n, n + 1):
                nets = pair_nets(side, depth, column)
                stack = NEAR_BLIND.get((side, depth, column), near_stack)
                routed = (side, depth, column) not in UNROUTED
                middle, u = 3.0 * column, 15.5 - depth
                far = far_place(side, depth, column)
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
    stack, part = FAR_BLIND.get((side, depth, column), LINKS[side][depth][3]), far_side(side, column)
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
            if depth == 7 and side == "S":
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
        _, row_pitch, pin_pitch, _ = FAR[side]
        stack = "PRESSFIT_40" if side == "W" else "VIA_25"
        taken = set()
        for depth, n in DEPTHS.items():
            for column in range(-n, n + 1):
                if (side, depth, column) in UNROUTED:
                    continue
                u, v = far_place(side, depth, column)
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
