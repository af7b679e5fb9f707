#!/usr/bin/python3
"""Slices a closed triangle mesh to a stack of masks; the tests' own slicer.

    slice_mesh.py MESH.js OUT --height 30 [--up Y] [--turn DEG] [--lift 0] [--grey] ...

MESH.js is the data file of the npm package `bunny` (exports.positions, exports.cells). The mesh is
turned so that the axis `--up` points to the window, then by `--turn` degrees about the image's x
axis, scaled to `--height` mm, centred in the image and cut at the mid height of every layer. A pixel is inside by
the even-odd rule along its row: at its centre, or with --grey as the share of 4 x 4 points.

`--report` writes nothing and prints, per layer that has any, the overhanging pixels (present here
and not in the layer before) and those that have the part itself on their plate side, where no
straight post can reach them.

The default, the bunny lying on its side (--up X, no turn), was chosen so. At 30 mm, 0.1 mm pixels and
layers, tips were allowed wherever a straight post of 0.8 mm with 0.3 mm of clearance beyond a neck of
1.5 mm has free sight to the plate, and the carried distance (40 degrees) from them was computed:

    up  turn  overhang px  hidden  largest distance from an allowed tip
    X     0      42527      6.3 %   0.25 mm
    -X    0      42522      6.3 %   0.35 mm
    Y     0      50448     14.9 %   2.98 mm   (the ears lie over the back: over a reach of 1.5 mm)
    Y    30      50022      6.6 %   0.71 mm
    -Y    0      51012     14.7 %   1.49 mm
    Z     0      93919      2.3 %   0.24 mm   (39 x 38 mm in plan: twice the area to peel)
"""
import argparse
import json
import re
import sys
from pathlib import Path

import numpy as np

from stack_io import write_mask

AXES = {"X": ((1, 2, 0), 1), "Y": ((2, 0, 1), 1), "Z": ((0, 1, 2), 1),
        "-X": ((2, 1, 0), -1), "-Y": ((0, 2, 1), -1), "-Z": ((1, 0, 2), -1)}


def read_mesh(path):
    """positions [points][3] and cells [triangles][3] from the package's script, without running it."""
    text = Path(path).read_text()
    tables = {}
    for name in ("positions", "cells"):
        found = re.search(rf"exports\.{name}\s*=\s*(\[\[.*?\]\])", text, re.S)
        if not found:
            sys.exit(f"slice_mesh: no exports.{name}, {path}, give the data file of the package bunny")
        tables[name] = np.array(json.loads(found.group(1)))
    return tables["positions"].astype(float), tables["cells"].astype(int)


def check_closed(cells):
    """Every edge must be used once in each direction."""
    edges = np.vstack([cells[:, [0, 1]], cells[:, [1, 2]], cells[:, [2, 0]]])
    there = {tuple(e) for e in edges}
    loose = sum((b, a) not in there for a, b in there)
    return loose, len(edges) - len(there)


def place(positions, up, turn, height, width_mm, depth_mm):
    """Points in mm: x and y in the image's frame, z from 0 at the plate."""
    order, sign = AXES[up]
    points = positions[:, list(order)].copy()
    points[:, 2] *= sign
    angle = np.radians(turn)
    y, z = points[:, 1].copy(), points[:, 2].copy()
    points[:, 1] = y * np.cos(angle) - z * np.sin(angle)
    points[:, 2] = y * np.sin(angle) + z * np.cos(angle)
    low, high = points.min(axis=0), points.max(axis=0)
    points = (points - (low + high) / 2) * (height / (high[2] - low[2]))
    points += (width_mm / 2, depth_mm / 2, height / 2)
    return points


def segments_at(triangles, z):
    """[n][2][2] (x, y) ends of the cuts of triangles [m][3][3] with the plane at z."""
    heights = triangles[:, :, 2]
    cut = triangles[(heights.min(axis=1) < z) & (heights.max(axis=1) >= z)]
    ends = np.full((len(cut), 2, 2), np.nan)
    filled = np.zeros(len(cut), int)
    for a, b in ((0, 1), (1, 2), (2, 0)):
        za, zb = cut[:, a, 2], cut[:, b, 2]
        crosses = np.flatnonzero((za < z) != (zb < z))
        share = ((z - za[crosses]) / (zb[crosses] - za[crosses]))[:, None]
        ends[crosses, filled[crosses]] = cut[crosses, a, :2] + share * (
            cut[crosses, b, :2] - cut[crosses, a, :2])
        filled[crosses] += 1
    return ends[filled == 2]


def fill(segments, columns, rows):
    """Even-odd: inside [len(rows)][len(columns)] at the points (columns, rows), both ascending and
    evenly spaced."""
    flips = np.zeros((len(rows), len(columns) + 1), np.int32)
    step_y, step_x = rows[1] - rows[0], columns[1] - columns[0]
    for (xa, ya), (xb, yb) in segments:
        first = int(np.ceil((min(ya, yb) - rows[0]) / step_y))
        last = int(np.ceil((max(ya, yb) - rows[0]) / step_y))  # half open: no vertex counts twice
        hit = np.arange(max(first, 0), min(last, len(rows)))
        if len(hit):
            x = xa + (rows[hit] - ya) * (xb - xa) / (yb - ya)
            at = np.clip(np.ceil((x - columns[0]) / step_x).astype(int), 0, len(columns))
            np.add.at(flips, (hit, at), 1)
    return np.cumsum(flips[:, :-1], axis=1) % 2 == 1


def slice_layer(triangles, z, options):
    """One mask [height][width] of uint8."""
    sub = 4 if options.grey else 1
    width, height, pixel = *options.size_px, options.pixel_um / 1000
    columns = (np.arange(width * sub) + 0.5) * pixel / sub
    rows = (np.arange(height * sub) + 0.5) * pixel / sub
    inside = fill(segments_at(triangles, z), columns, rows)
    if sub == 1:
        return inside.astype(np.uint8) * 255
    share = inside.reshape(height, sub, width, sub).mean(axis=(1, 3))
    return np.floor(share * 255 + 0.5).astype(np.uint8)


def report(masks):
    """Prints overhang pixels and those hidden from the plate; returns both sums."""
    seen = before = None
    total = hidden_total = 0
    for layer, mask in enumerate(masks):
        now = mask >= 128
        if before is not None:
            fresh = now & ~before
            hidden = int((fresh & seen).sum())
            total, hidden_total = total + int(fresh.sum()), hidden_total + hidden
            if hidden:
                print(f"layer {layer}: {int(fresh.sum())} overhanging, {hidden} hidden")
        seen = now if before is None else seen | now
        before = now
    print(f"all layers: {total} overhanging, {hidden_total} hidden "
          f"({100 * hidden_total / max(total, 1):.1f} %)")
    return total, hidden_total


def arguments():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("mesh")
    parser.add_argument("out")
    parser.add_argument("--height", type=float, default=30.0, help="mm")
    parser.add_argument("--up", choices=AXES, default="X",
                        help="write --up=-X for the negative axes")
    parser.add_argument("--turn", type=float, default=0.0, help="degrees about the image's x axis")
    parser.add_argument("--lift", type=int, default=0, help="empty layers first")
    parser.add_argument("--size-px", type=int, nargs=2, default=(1280, 800))
    parser.add_argument("--pixel-um", type=float, default=50.0)
    parser.add_argument("--layer-um", type=float, default=50.0)
    parser.add_argument("--grey", action="store_true", help="4 x 4 points a pixel")
    parser.add_argument("--report", action="store_true")
    return parser.parse_args()


def main():
    options = arguments()
    positions, cells = read_mesh(options.mesh)
    loose, doubled = check_closed(cells)
    if loose or doubled:
        sys.exit(f"slice_mesh: {loose} open and {doubled} doubled edges, {options.mesh}, "
                 "give a closed mesh")
    pixel = options.pixel_um / 1000
    points = place(positions, options.up, options.turn, options.height,
                   options.size_px[0] * pixel, options.size_px[1] * pixel)
    if points.min() < -1e-9 or np.any(points[:, :2].max(axis=0) > np.array(options.size_px) * pixel):
        sys.exit("slice_mesh: the mesh is larger than the image, lower --height")
    triangles = points[cells]
    layer = options.layer_um / 1000
    count = round(options.height / layer)
    masks = (slice_layer(triangles, (n + 0.5) * layer, options) for n in range(count))
    if options.report:
        report(masks)
        return
    out = Path(options.out)
    out.mkdir(parents=True, exist_ok=True)
    blank = np.zeros((options.size_px[1], options.size_px[0]), np.uint8)
    for n in range(options.lift):
        write_mask(out / f"layer_{n + 1:04d}.png", blank)
    for n, mask in enumerate(masks):
        write_mask(out / f"layer_{options.lift + n + 1:04d}.png", mask)
    print(f"{options.lift + count} layers in {out}")


if __name__ == "__main__":
    main()
