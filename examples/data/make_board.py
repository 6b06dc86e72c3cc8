#!/usr/bin/env python3
"""Writes demo_board.xml.gz: the Heron line card, a board of our own invention in IPC-2581 revision C.

Nothing in it is real: no firm, no product, no person, no part. It is drawn to give a back-drill planner
something of everything: 20 copper layers, about 2,100 plated holes, six link speeds, pairs, blind and buried
spans, press-fit pins, via-in-pad, planes drawn as positive and as negative artwork. heron_card.py draws it, this
file writes it down.

Python's standard library only, and always the same text:

    python3 make_board.py [demo_board.xml.gz]
"""
import gzip
import io
import os
import sys
from collections import defaultdict

from heron_card import (
    COPPER, CORE_AREA, NEGATIVE, PARTS, SIZE, SPANS, STACKS, STACKUP, TRACE, make_board,
)


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
        w.line('<Dielectric type="DIELECTRIC_CONSTANT"><Property value="%s" refUnit="GHZ" refValue="10"/></Dielectric>'
               % num(dk))
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


def components(w):
    """Just enough to say on which side a part stands: one package for all."""
    w.open('Package name="INVENTED" type="OTHER" pinOne="1" pinOneOrientation="OTHER"')
    w.open("Outline")
    polygon(w, "Polygon", rectangle(-1, -1, 1, 1))
    w.line('<LineDescRef id="W100"/>')
    w.close("Outline", "Package")
    for name, (side, place) in PARTS.items():
        mount = "THMT" if name[0] == "J" else "SMT"
        w.open('Component refDes="%s" packageRef="INVENTED" part="INVENTED" layerRef="%s" mountType="%s"'
               % (name, side, mount))
        w.line('<Location x="%s" y="%s"/>' % tuple(map(num, place)))
        w.close("Component")


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
    components(w)
    for layer in COPPER:
        layer_features(w, board, layer)
    for span in SPANS:
        drill_features(w, board, span)
    tooling(w)
    w.close("Step", "CadData", "Ecad", "IPC-2581")
    return w.out.getvalue().encode("utf-8")


def main(arguments):
    here = os.path.dirname(os.path.abspath(__file__))
    path = arguments[0] if arguments else os.path.join(here, "demo_board.xml.gz")
    data = write(make_board())
    with open(path, "wb") as file, gzip.GzipFile("", "wb", 9, file, mtime=0) as packed:
        packed.write(data)
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
