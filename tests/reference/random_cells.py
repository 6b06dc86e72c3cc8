"""Random cells in the schema of tests/data/axisym/cases.json: stubs in stackups as boards have them. Nothing in the library
was fitted to them. Run as a script it writes a file for evaluate_cells.py: random_cells.py COUNT [SEED] > CELLS.json.

Beyond that schema, "wall" may be {"type": "vias", "places": [[x, y], ...], "r": RADIUS}: return vias at given places."""

import json
import math
import random
import sys


def cell(seed):
    """The cell of a seed: 3 to 23 dielectrics of 0.06 to 0.5 mm below the plane that the stub hangs on."""
    draw = random.Random(seed)
    count = draw.randint(3, 23)
    drill = draw.uniform(0.15e-3, 0.4e-3)       # diameters here, radii in a cell
    pad = drill + draw.uniform(0.15e-3, 0.3e-3)
    antipad = max(drill + draw.uniform(0.3e-3, 0.6e-3), pad + 0.06e-3)
    layers = _layers(draw, count)
    copper = _copper(draw, count, pad / 2, antipad / 2)
    length = sum(layer["h"] for layer in layers) + sum(sheet["t"] for sheet in copper[1:])
    end = _end(draw, drill / 2, length, copper, layers)
    widest = max(sheet["antipad"] for sheet in copper)
    return {
        "id": f"R{seed}", "note": "random", "a": drill / 2, "copper": copper, "layers": layers,
        "wall": _wall(draw, widest), "end": end,
        "below": draw.choice([{"type": "open"}, {"type": "lid", "height": draw.uniform(1e-3, 3e-3)}])}


def _layers(draw, count):
    """Cores and prepregs of one or two laminates; many layers are thin ones, as no board is 10 mm thick."""
    laminates = []
    for _ in range(2):
        dk = draw.uniform(2.9, 4.5)
        laminates.append({"eps_rho": dk * draw.uniform(1.0, 1.2), "eps_z": dk, "tand": draw.choice([0.0, draw.uniform(0.001, 0.02)])})
    most = min(0.5e-3, max(0.15e-3, 4e-3 / count))
    core, prepreg = draw.uniform(0.06e-3, most), draw.uniform(0.06e-3, most)
    odd = draw.random() < 0.25                  # or every layer its own thickness
    return [{"h": draw.uniform(0.06e-3, most) if odd else (core, prepreg)[k % 2], **laminates[k % 2 if draw.random() < 0.8 else 0]}
            for k in range(count)]


def _copper(draw, count, pad, antipad):
    """Planes and signal layers; pads on few, on all of a kind, or on any; antipads alike or each its own."""
    t = draw.choice([12e-6, 17e-6, 17e-6, 35e-6, 70e-6])
    signals = draw.choice([0.0, 0.3, 0.5, 0.6])
    on_planes, on_signals = draw.choice([0.0, 0.0, 0.3, 1.0]), draw.choice([0.0, 0.2, 1.0])
    uneven = draw.random() < 0.3
    sheets = [{"t": t, "present": True, "antipad": antipad, "pad": None}]
    for k in range(1, count + 1):
        last = k == count
        plane = draw.random() >= (0.7 if last else signals)
        has_pad = draw.random() < (0.85 if last else on_planes if plane else on_signals)
        own = max(antipad * draw.uniform(0.85, 1.3), pad + 0.03e-3) if uneven else antipad
        sheets.append({"t": draw.choice([t, 17e-6, 35e-6]) if last else t, "present": plane, "antipad": own, "pad": pad if has_pad else None})
    return sheets


def _wall(draw, least):
    kind = draw.choice(["pec", "pec", "vias", "vias", "open"])
    if kind == "open":
        return {"type": "open"}
    if kind == "pec":
        return {"type": "pec", "r": least + draw.uniform(0.05e-3, 0.9e-3)}
    radius, count = draw.uniform(0.07e-3, 0.15e-3), draw.randint(2, 6)
    distance = least + radius + draw.uniform(0.05e-3, 0.9e-3)
    jitter = draw.choice([0.0, 0.2])
    angles = [2 * math.pi * (k + jitter * draw.uniform(-1, 1)) / count for k in range(count)]
    return {"type": "vias", "places": [[distance * math.cos(v), distance * math.sin(v)] for v in angles], "r": radius}


def _end(draw, a, length, copper, layers):
    """A pad, or a drill that ends somewhere in a dielectric."""
    if draw.random() < 0.5:
        return {"type": "pad"}
    spans, z = [], 0.0
    for k, layer in enumerate(layers):
        spans.append((z, z + layer["h"]))
        z += layer["h"] + copper[k + 1]["t"]
    spans = [(top, bottom) for top, bottom in spans if bottom > min(0.3e-3, 0.5 * length)]
    top, bottom = draw.choice(spans)
    hole = a + draw.uniform(0.075e-3, 0.15e-3)
    for k, sheet in enumerate(copper):          # the bit takes what it meets of the pads below; planes keep clear of it
        sheet["antipad"] = max(sheet["antipad"], hole + 0.05e-3)
    return {"type": "drill", "L": max(draw.uniform(top, bottom), 0.15e-3), "rd": hole,
            "eps_fill": draw.choice([1.0, 1.0, draw.uniform(2.8, 4.0)])}


def main():
    count, seed = int(sys.argv[1]), int(sys.argv[2]) if len(sys.argv) > 2 else 0
    json.dump({"cases": [cell(seed + k) for k in range(count)]}, sys.stdout, indent=1)


if __name__ == "__main__":
    main()
