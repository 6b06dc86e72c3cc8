#!/usr/bin/env python3
"""Draws docs/figures/*.png: what the cavity model is made of, and the fidelities against full-wave data.

    make_figures.py [FOLDER]

FOLDER: where the pictures go, else docs/figures. Needs the Python package, NumPy, SciPy and Matplotlib.
"""
import csv
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
sys.path.insert(0, str(ROOT / "tests" / "reference"))
sys.dont_write_bytecode = True
from cells import DATA, cases, via_of  # noqa: E402

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


def main(arguments):
    folder = Path(arguments[0]) if arguments else ROOT / "docs" / "figures"
    folder.mkdir(parents=True, exist_ok=True)
    warnings.simplefilter("ignore", ls.RangeWarning)
    model_picture(folder)
    curves_picture(folder)
    errors_picture(folder)


if __name__ == "__main__":
    main(sys.argv[1:])
