#!/usr/bin/python3
"""Recomputes from a raw stack what `report.json` says of its layers, with scipy.ndimage.label.

    check_survey.py STACK report.json --pixel-um 50 50 --solid-level 94 [--intent-level 0.5]
    check_survey.py --self-test

Definitions that are checked, all exactly:
  regions            4-connected regions of intended pixels (share of full grey >= intent level)
  solid_px           pixels with grey >= --solid-level, of 255
  onset_px           pixels of regions of layer n > 0 that share no pixel with layer n - 1
  adrift_px          pixels of layer n whose body, of layers 0..n, has nothing in layer 0
  blind_cavity_mm2   area in layer n of void bodies of layers 0..n that do not reach the image's
                     surroundings; void is 8-connected in the layer, complement of solid, joined by
                     shared pixels; the plate closes layer 0, the window closes layer n
  enclosed-resin     whether, at the end, any void is closed on all sides, and its pixels over all
                     layers
The area in the report is rounded to 6 digits, so it is compared within 1e-5 of itself.
"""
import argparse
import json
import sys
import tempfile
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tools"))
from bodies import Solid, Void  # noqa: E402
from stack_io import intended, layer_files, read_mask, write_mask  # noqa: E402

EXACT = ("solid_px", "regions", "onset_px", "adrift_px")


def survey(stack, pixel_area, solid_level, intent_level):
    """Rows of the layers, and the pixels of enclosed resin."""
    solid, void, rows = Solid(), Void(), []
    for file in layer_files(stack):
        grey = read_mask(file)
        cures = grey >= solid_level
        solid.add(intended(grey, intent_level))
        void.add(cures)
        rows.append({"layer": len(rows), "solid_px": int(cures.sum()), "regions": solid.regions(),
                     "onset_px": solid.onset_px(), "adrift_px": solid.adrift_px(),
                     "blind_cavity_mm2": void.blind_px() * pixel_area})
    return rows, sum(pixels for _, pixels in void.enclosed())


def compare(rows, enclosed_px, report):
    """Differences as text."""
    wrong = []
    if len(report["layers"]) != len(rows):
        wrong.append(f"{len(report['layers'])} layers reported, {len(rows)} found")
    for ours, theirs in zip(rows, report["layers"]):
        wrong += [f"layer {ours['layer']}: {key} {theirs.get(key)} reported, {ours[key]} found"
                  for key in ("layer", *EXACT) if theirs.get(key) != ours[key]]
        area, said = ours["blind_cavity_mm2"], theirs.get("blind_cavity_mm2")
        if said is None or abs(said - area) > 1e-5 * area:
            wrong.append(f"layer {ours['layer']}: blind_cavity_mm2 {said} reported, {area} found")
    said_px = sum(f["pixels"] for f in report["findings"] if f["kind"] == "enclosed-resin")
    if said_px != enclosed_px:
        wrong.append(f"enclosed-resin: {said_px} px reported, {enclosed_px} found")
    return wrong


def small_stack(folder):
    """Seven layers of 12 x 12 whose rows are known by hand."""
    layers = np.zeros((7, 12, 12), np.uint8)
    layers[0:4, 1:6, 1:6] = 255       # a block of 5 x 5
    layers[1:3, 3, 3] = 0             # with a closed hole in layers 1 and 2
    layers[2:5, 8:10, 8:10] = 255     # a block of 2 x 2 that begins in layer 2: an onset of 4,
    layers[4, 1:10, 1:10] = 255       # and is caught by a plate of 9 x 9 in layer 4
    layers[5:7, 1:8, 1:8] = 255       # then a cup of 7 x 7, 3 x 3 open toward the window
    layers[5:7, 3:6, 3:6] = 0
    layers[6, 11, 11] = 100           # solid from 94 on, but not intended
    for n, layer in enumerate(layers):
        write_mask(folder / f"layer_{n + 1:04d}.png", layer)
    values = [(25, 1, 0, 0, 0), (24, 1, 0, 0, 1), (28, 2, 4, 4, 1), (29, 2, 0, 4, 0),
              (81, 1, 0, 0, 0), (40, 1, 0, 0, 9), (41, 1, 0, 0, 9)]
    rows = [{"layer": n, "solid_px": v[0], "regions": v[1], "onset_px": v[2], "adrift_px": v[3],
             "blind_cavity_mm2": v[4] * 0.01} for n, v in enumerate(values)]
    return {"layers": rows, "findings": [{"kind": "enclosed-resin", "pixels": 2}]}


def self_test():
    """The rows known by hand must agree, and any single change of them must be found."""
    with tempfile.TemporaryDirectory() as name:
        known = small_stack(Path(name))
        rows, enclosed = survey(name, 0.01, 94, 0.5)
    failures = compare(rows, enclosed, known)
    for n in range(7):
        for key in (*EXACT, "blind_cavity_mm2"):
            broken = json.loads(json.dumps(known))
            broken["layers"][n][key] += 1
            if len(compare(rows, enclosed, broken)) != 1:
                failures.append(f"a wrong {key} in layer {n} was not found")
    for broken in ({**known, "findings": []}, {**known, "layers": known["layers"][:-1]}):
        if len(compare(rows, enclosed, broken)) != 1:
            failures.append("a missing finding or layer was not found")
    return failures


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("stack", nargs="?")
    parser.add_argument("report", nargs="?")
    parser.add_argument("--pixel-um", type=float, nargs=2)
    parser.add_argument("--solid-level", type=float, help="smallest grey, of 255, that cures")
    parser.add_argument("--intent-level", type=float, default=0.5)
    parser.add_argument("--self-test", action="store_true")
    options = parser.parse_args()
    if options.self_test:
        wrong = self_test()
    elif None in (options.stack, options.report, options.pixel_um, options.solid_level):
        parser.error("needs STACK, report.json, --pixel-um and --solid-level, or --self-test")
    else:
        area = options.pixel_um[0] * options.pixel_um[1] * 1e-6
        rows, enclosed = survey(options.stack, area, options.solid_level, options.intent_level)
        wrong = compare(rows, enclosed, json.loads(Path(options.report).read_text()))
    for line in wrong[:40]:
        print(line)
    print("check_survey: " + (f"{len(wrong)} differences" if wrong else "equal"))
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
