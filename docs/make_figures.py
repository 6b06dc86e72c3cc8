#!/usr/bin/env python3
"""Draws docs/figures/*.png: what the cavity model is made of, the fidelities and transitions against full-wave data.

    make_figures.py [FOLDER]

FOLDER: where the pictures go, else docs/figures. Needs the Python package, NumPy, SciPy and Matplotlib.
"""
import csv
import json
import math
import sys
import warnings
from pathlib import Path

import matplotlib
import numpy as np
from scipy.sparse import lil_matrix
from scipy.sparse.linalg import spsolve

import libstub as ls

matplotlib.use("Agg")
import matplotlib.pyplot as plt  # noqa: E402
from matplotlib.patches import Rectangle  # noqa: E402

ROOT = Path(__file__).resolve().parent.parent
sys.path[:0] = [str(ROOT / "tests" / "reference"), str(ROOT / "docs")]
sys.dont_write_bytecode = True
import transitions  # noqa: E402
from cells import DATA, cases, via_of  # noqa: E402
from make_error_table import curves_of  # noqa: E402

FIDELITIES = {"bulk": "tab:gray", "loaded": "tab:orange", "ladder": "tab:green", "cavity": "tab:blue"}
COPPER, BARREL, LAMINATE = "#c98b4a", "#a86a2c", "#eef3ea"
A, B, REACH, HEIGHT, SHEET = 0.125, 0.375, 0.7, 0.2, 0.035      # mm: barrel and antipad radius, what is drawn, cavity, copper


def potential(step=0.005):
    """Static potential around a barrel at 1 V that passes planes at 0 V: finite differences of div(rho grad), mm."""
    period = HEIGHT + SHEET
    rho = np.arange(A, REACH + step / 2, step)
    z = np.arange(-0.5 * HEIGHT - SHEET, period + 0.5 * HEIGHT + step / 2, step)
    inside = (z[:, None] % period > HEIGHT - 1e-9) & (rho[None, :] > B - 1e-9)       # copper of a plane
    known = inside | (rho[None, :] < A + step / 2)
    number = np.full(known.shape, -1)
    number[~known] = np.arange(np.count_nonzero(~known))
    value = np.where(known & ~inside, 1.0, 0.0)
    matrix, right = lil_matrix((number.max() + 1,) * 2), np.zeros(number.max() + 1)
    for i, k in zip(*np.nonzero(~known)):
        row = number[i, k]
        for di, dk, weight in ((1, 0, rho[k]), (-1, 0, rho[k]), (0, 1, rho[k] + step / 2), (0, -1, rho[k] - step / 2)):
            j, m = i + di, k + dk
            if not (0 <= j < len(z) and m < len(rho)):
                continue                                                             # symmetry, or far away
            matrix[row, row] += weight
            if number[j, m] >= 0:
                matrix[row, number[j, m]] -= weight
            else:
                right[row] += weight * value[j, m]
    value[~known] = spsolve(matrix.tocsr(), right)
    return rho, z, value


def copper(axis, planes):
    axis.set_facecolor(LAMINATE)
    axis.add_patch(Rectangle((0, -1), A, 3, color=BARREL))
    for top in planes:
        axis.add_patch(Rectangle((B, top), REACH - B, SHEET, facecolor=COPPER, edgecolor=BARREL, linewidth=0.5))


def model_picture(folder):
    figure, (left, right) = plt.subplots(1, 2, figsize=(9.2, 4.4), sharey=True, layout="constrained")
    rho, z, value = potential()
    period = HEIGHT + SHEET
    planes = [HEIGHT - period, HEIGHT]
    for axis in (left, right):
        copper(axis, planes)
        axis.set(xlim=(0.05, REACH), xlabel="radius, mm")
    shades = left.contourf(rho, z, value, levels=np.linspace(0, 1, 21), cmap="Blues", zorder=0)
    left.contour(rho, z, value, levels=np.arange(0.05, 1.0, 0.05), colors="k", linewidths=0.6, zorder=0.5)
    figure.colorbar(shades, ax=left, label="V", ticks=np.linspace(0, 1, 6))
    left.set(ylim=(period + 0.5 * HEIGHT, -0.5 * HEIGHT - SHEET), ylabel="depth, mm", title="static potential")
    left.text(A - 0.035, HEIGHT / 2, "barrel, 1 V", rotation=90, fontsize=8, ha="center", va="center")
    left.text(0.5 * (B + REACH), HEIGHT + SHEET / 2, "plane, 0 V", fontsize=8, ha="center", va="center")
    parts = 4
    edges = B - (B - A) * np.linspace(1, 0, 2 * parts + 1) ** 2.5                     # as the model grades them
    for top in planes:
        for level in (top, top + SHEET):
            for i in range(parts):
                colour = plt.cm.tab10(i)
                right.plot(edges[2 * i:2 * i + 3:2], [level] * 2, color=colour, linewidth=3.5, solid_capstyle="butt")
                right.plot([edges[2 * i + 1]] * 2, [level - 0.006, level + 0.006], color="k", linewidth=0.8)
    right.annotate("annuli $V_1 \\dots V_4$ of an opening,\neach of two parts with a fixed ratio", (edges[2], planes[0] + SHEET + 0.003), (0.30, 0.055),
                   fontsize=8, arrowprops={"arrowstyle": "->"})
    right.text(0.5 * (A + REACH), 0.145, "slab (dielectric): $\\Sigma\\, \\cos(n\\pi z/h)$, $n = 0, 1, 2 \\dots$", fontsize=8, ha="center")
    right.annotate("slab (copper layer)", (0.5 * (A + B), HEIGHT + SHEET / 2), (0.36, period + 0.06), fontsize=8,
                   arrowprops={"arrowstyle": "->"})
    right.annotate("", (0.67, 0), (0.67, HEIGHT), arrowprops={"arrowstyle": "<->", "linewidth": 0.8})
    right.text(0.655, HEIGHT / 2, "$h$", fontsize=9, ha="right", va="center")
    right.set_title("slabs, openings, annuli")
    figure.savefig(folder / "cavity_model.png", dpi=130)
    plt.close(figure)


def curve_of(case):
    rows = [[float(x) for x in row] for row in csv.reader(open(DATA / "curves" / f"{case['id']}.csv")) if row[0][0].isdigit()]
    return np.array([(row[0], 20 * math.log10(max(math.hypot(row[5], row[6]), 1e-15))) for row in rows]).T


def curves_picture(folder, names=("C08", "C20")):
    figure, axes = plt.subplots(1, len(names), figsize=(9.2, 3.6), sharey=True, layout="constrained")
    known = {case["id"]: (case, result) for case, result in cases()}
    for axis, name in zip(axes, names):
        case, result = known[name]
        f, level = curve_of(case)
        grid = np.linspace(f[0], min(f[-1], 110e9), 3000)
        for fidelity, colour in FIDELITIES.items():
            loss = via_of(case, result["f1_Hz"]).model(fidelity=fidelity).added_loss(grid)
            axis.plot(grid / 1e9, -np.asarray(loss), color=colour, label=fidelity, linewidth=1.2)
        axis.plot(f / 1e9, level, "k.", markersize=2.2, label="full wave")
        axis.set(title=f"{name}: {case['note']}", xlabel="frequency, GHz", ylim=(-45, 1), xlim=(0, grid[-1] / 1e9))
        axis.title.set_fontsize(9)
        axis.grid(alpha=0.3)
    axes[0].set_ylabel("|S21|, dB")
    axes[-1].legend(fontsize=8)
    figure.savefig(folder / "fidelities.png", dpi=130)
    plt.close(figure)


def errors_picture(folder):
    figure, axis = plt.subplots(figsize=(9.2, 3.4), layout="constrained")
    known = list(cases())
    for fidelity, colour in FIDELITIES.items():
        errors = [100 * abs(via_of(c, r["f1_Hz"]).model(fidelity=fidelity).notches(400e9)[0].f / r["f1_Hz"] - 1) for c, r in known]
        axis.plot(range(len(known)), np.maximum(errors, 1e-3), "o", color=colour, label=fidelity, markersize=5)
    estimates = [100 * notch.error for notch in (via_of(c, r["f1_Hz"]).model().notches(400e9)[0] for c, r in known)]
    axis.plot(range(len(known)), estimates, "_", color="tab:blue", markersize=11, label="cavity: its own estimate")
    axis.set(yscale="log", ylabel="error of the first notch, %", ylim=(1e-3, 100))
    axis.set_xticks(range(len(known)), [c["id"] for c, _ in known], rotation=60, fontsize=8)
    axis.grid(alpha=0.3, which="both", axis="y")
    axis.legend(fontsize=8, ncols=5, loc="lower center")
    figure.savefig(folder / "errors.png", dpi=130)
    plt.close(figure)


def transition_picture(folder):
    """Cross-section of a via that leaves on two inner layers, in mm; copper and pads drawn thicker than they are."""
    figure, axis = plt.subplots(figsize=(9.2, 4.6), layout="constrained")
    a, pad, antipad, reach, ring, sheet = 0.125, 0.225, 0.375, 2.1, 1.15, 0.035
    planes, traces, bottom = [0.2, 0.6, 1.0, 1.4], [0.4, 1.2], 1.6
    axis.add_patch(Rectangle((-reach, 0), 2 * reach, bottom + sheet, color=LAMINATE))
    vias = [-ring, ring]
    for x in (0.0, *vias):
        axis.add_patch(Rectangle((x - a, 0), 2 * a, bottom + sheet, color=BARREL, zorder=3))
    for top in planes:
        for x0, x1 in ((-reach, -antipad), (antipad, reach)):
            axis.add_patch(Rectangle((x0, top), x1 - x0, sheet, facecolor=COPPER, edgecolor=BARREL, linewidth=0.5, zorder=2))
    for z in (0.0, *traces, bottom):
        axis.add_patch(Rectangle((-pad, z), 2 * pad, sheet, color=BARREL, zorder=3))
    for z, way in zip(traces, (-1, 1)):
        x0 = way * pad if way > 0 else -0.95
        axis.add_patch(Rectangle((x0, z), 0.95 - pad, sheet, color="tab:blue", zorder=4))
        end, middle = way * 0.95, z + sheet / 2
        axis.plot([end] * 2, [middle - 0.09, middle + 0.09], "k--", linewidth=0.9, zorder=5)
        axis.annotate("", (way * pad, middle + 0.075), (end, middle + 0.075), arrowprops={"arrowstyle": "<->", "linewidth": 0.7}, zorder=5)
        axis.text(way * 0.72, middle + 0.085, "line", fontsize=8, ha="center", va="top")
        axis.plot([way * pad, way * antipad], [middle - 0.045] * 2, color="tab:red", linewidth=2, zorder=5)
    axis.text(-0.98, traces[0] - 0.02, "port 1", fontsize=9, ha="right", va="center", weight="bold", zorder=5)
    axis.text(0.98, traces[1] - 0.02, "port 2", fontsize=9, ha="left", va="center", weight="bold", zorder=5,
              bbox={"facecolor": LAMINATE, "edgecolor": "none", "pad": 0.5})
    axis.annotate("launch: pad's rim\nto antipads' rims", (0.32, traces[1] - 0.05), (0.42, 0.955), fontsize=8, color="tab:red",
                  arrowprops={"arrowstyle": "->", "color": "tab:red", "linewidth": 0.8}, zorder=6)
    for z0, z1, text in ((0, traces[0], "stub"), (traces[0] + sheet, traces[1], "path"), (traces[1] + sheet, bottom + sheet, "stub")):
        axis.annotate("", (-0.52, z0), (-0.52, z1), arrowprops={"arrowstyle": "<->", "linewidth": 0.9, "shrinkA": 0, "shrinkB": 0}, zorder=6)
        axis.text(-0.56, 0.5 * (z0 + z1), text, fontsize=9, ha="right", va="center", zorder=6,
                  bbox={"facecolor": LAMINATE, "edgecolor": "none", "pad": 0.5})
    for z0, z1, text in ((planes[0] + sheet, traces[0], "$h_u$"), (traces[0] + sheet, planes[1], "$h_l$")):
        axis.annotate("", (0.85, z0), (0.85, z1), arrowprops={"arrowstyle": "<->", "linewidth": 0.8, "shrinkA": 0, "shrinkB": 0}, zorder=6)
        axis.text(0.88, 0.5 * (z0 + z1), text, fontsize=9, va="center", zorder=6)
    axis.plot([-0.84, 0.84], [traces[0] + sheet / 2] * 2, color="tab:blue", linewidth=0.8, linestyle=":", zorder=1)
    axis.text(0.5 * (a + ring - a), 0.715, "mode 0: there and back, $\\Gamma$", fontsize=8, ha="center", va="bottom", color="tab:green", zorder=6)
    axis.annotate("", (ring - a, 0.74), (a, 0.74), arrowprops={"arrowstyle": "<->", "linewidth": 0.9, "color": "tab:green"}, zorder=6)
    axis.text(ring, -0.04, "return via", fontsize=8, ha="center", va="bottom")
    axis.text(-ring, -0.04, "return via", fontsize=8, ha="center", va="bottom")
    axis.text(0, -0.04, "barrel", fontsize=8, ha="center", va="bottom")
    axis.set(xlim=(-reach, reach), ylim=(bottom + 0.12, -0.16), xlabel="mm", ylabel="depth, mm")
    axis.set_aspect("equal")
    figure.savefig(folder / "transition.png", dpi=130)
    plt.close(figure)


def decibels(values):
    return 20 * np.log10(np.abs(values))


def transitions_picture(folder):
    known = {case["id"]: (case, result) for case, result in transitions.cases()}
    figure, (left, middle, right) = plt.subplots(1, 3, figsize=(9.2, 3.5), layout="constrained")
    grid = np.linspace(1e9, 50e9, 1500)
    for name, colour, text in (("s_k4", "tab:blue", "stub of 1.2 mm"), ("n_k4", "tab:green", "no stub")):
        case, result = known[name]
        s = np.array(transitions.transition_of(case).s(grid))
        f, curves = curves_of(transitions.DATA / "curves" / f"{name}.csv")
        f = np.array(f) * (result["f1_Hz"] / result["f1_raw_Hz"] if "f1_Hz" in result else 1.0)
        for axis, (i, j) in ((left, (1, 0)), (middle, (0, 0))):
            axis.plot(grid / 1e9, decibels(s[:, i, j]), color=colour, linewidth=1.2, label=text)
            axis.plot(f[::2] / 1e9, decibels(curves[f"S{i + 1}1"])[::2], ".", color="k", markersize=2.4, label="3-D" if name == "n_k4" else None)
    case = transitions.transition_of(json.loads((transitions.DATA / "unequal_pair" / "case.json").read_text(encoding="utf-8")))
    mixed = ls.to_mixed(np.array(case.s(grid)), [(0, 2), (1, 3)], z=case.reference).s
    f, curves = curves_of(transitions.DATA / "unequal_pair" / "curves.csv")
    c = {name: np.array(values) for name, values in curves.items()}
    for sign, row, colour, text in ((1, 3, "tab:red", "Scd21"), (-1, 1, "tab:blue", "Sdd21")):
        wanted = 0.5 * (c["S2A_1A"] - c["S2A_1B"] + sign * (c["S2B_1A"] - c["S2B_1B"]))
        right.plot(grid / 1e9, decibels(mixed[:, row, 0]), color=colour, linewidth=1.2, label=text)
        right.plot(np.array(f)[::2] / 1e9, decibels(wanted)[::2], "k.", markersize=2.4)
    for axis, title, low in ((left, "S21, single barrel", -35), (middle, "S11, single barrel", -40), (right, "pair, stubs of 1.0 and 0.5 mm", -40)):
        axis.set(title=title, xlabel="frequency, GHz", ylim=(low, 1), xlim=(0, 50))
        axis.title.set_fontsize(9)
        axis.grid(alpha=0.3)
        axis.legend(fontsize=8, loc="lower right")
    left.set_ylabel("dB")
    figure.savefig(folder / "transitions.png", dpi=130)
    plt.close(figure)


def main(arguments):
    folder = Path(arguments[0]) if arguments else ROOT / "docs" / "figures"
    folder.mkdir(parents=True, exist_ok=True)
    warnings.simplefilter("ignore", ls.RangeWarning)
    model_picture(folder)
    curves_picture(folder)
    errors_picture(folder)
    transition_picture(folder)
    transitions_picture(folder)


if __name__ == "__main__":
    main(sys.argv[1:])
