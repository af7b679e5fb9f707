#!/usr/bin/python3
"""Judges the folder that `falsework prop` wrote against the raw stack, from the files alone.

    check_prop.py RAW OUT --dense-debt PROGRAM --pixel-um 50 50 --layer-um 50 --reach-mm 1.5
                  --angle-deg 40 --clearance-mm 0.3 --tip-mm 0.3 [--intent-level 0.5]
    check_prop.py --self-test --dense-debt PROGRAM

Checked (definitions and tolerances stand in prop_checks.py, post_shape.py, bodies.py, dense_debt.c):
nothing adrift; no onset that holds the smallest tip; no pixel lowered, none raised outside the
posts' own circles; no overreach; clearance of shaft and foot; no new sealed void; layers in which
nothing changed keep their bytes; SHA256SUMS names every file and verifies; INPUT-SHA256SUMS and
raw_sha256 are those of RAW; every post is routed, has an id of its own and starts on the plate.
"""
import argparse
import hashlib
import json
import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tools"))
from post_shape import Shape  # noqa: E402
from prop_checks import (Altered, Clear, Connected, Held, Rules, Untouched, View,  # noqa: E402
                         Voids)
from stack_io import layer_files, read_mask  # noqa: E402


def sha256(path):
    return hashlib.sha256(Path(path).read_bytes()).hexdigest()


def stack_sha256(files):
    """SHA-256 over lines "digest index" of the layers' file bytes, in order."""
    lines = "".join(f"{sha256(file)} {n}\n" for n, file in enumerate(files))
    return hashlib.sha256(lines.encode()).hexdigest()


def read_sums(path):
    """{name: digest} of a list in the form of sha256sum."""
    pairs = (line.split(maxsplit=1) for line in path.read_text().splitlines())
    return {name.lstrip("*"): digest for digest, name in pairs}


def check_digests(raw_files, out, posts):
    wrong = []
    sums = read_sums(out / "SHA256SUMS")
    there = {str(f.relative_to(out)) for f in out.rglob("*") if f.is_file()} - {"SHA256SUMS"}
    wrong += [f"digest: {name} is not in SHA256SUMS" for name in sorted(there - set(sums))]
    wrong += [f"digest: {name} is in SHA256SUMS only" for name in sorted(set(sums) - there)]
    wrong += [f"digest: {name} differs" for name in sorted(there & set(sums))
              if sha256(out / name) != sums[name]]
    inputs = {Path(name).name: digest
              for name, digest in read_sums(out / "INPUT-SHA256SUMS").items()}
    wrong += [f"digest: input {file.name} differs or is not listed" for file in raw_files
              if inputs.get(file.name) != sha256(file)]
    if posts["raw_sha256"] != stack_sha256(raw_files):
        wrong.append("digest: raw_sha256 is not that of the raw stack")
    return wrong


def check_list(posts):
    ids = [post["id"] for post in posts["posts"]]
    wrong = [] if len(set(ids)) == len(ids) else ["posts: two have the same id"]
    for post in posts["posts"]:
        if not post["routed"] or len(post["path_mm"]) < 2 or abs(post["path_mm"][-1][2]) > 1e-6:
            wrong.append(f"posts: {post['id']} does not reach the plate")
    return wrong


def judge(raw, out, rules, program):
    """What is wrong, as text, and a line of figures."""
    out = Path(out)
    posts = json.loads((out / "posts.json").read_text())
    raw_files, out_files = layer_files(raw), layer_files(out / "layers")
    lift = posts["lift_layers"]
    wrong = check_list(posts) + check_digests(raw_files, out, posts)
    if len(out_files) != len(raw_files) + lift:
        return wrong + [f"layers: {len(out_files)}, not {len(raw_files)} + {lift}"], ""
    shapes = [Shape(post, rules.layer) for post in posts["posts"] if len(post["path_mm"]) > 0]
    blank = np.zeros_like(read_mask(raw_files[0]))
    held, clear = Held(program, blank.shape, rules), Clear(blank.shape, rules, shapes)
    untouched = Untouched()
    checks = [Altered(), untouched, Connected(), held, clear, Voids()]
    for n, out_file in enumerate(out_files):
        raw_file = raw_files[n - lift] if n >= lift else None
        view = View(n, read_mask(out_file), blank if raw_file is None else read_mask(raw_file),
                    out_file, raw_file, [s for s in shapes if s.in_layer(n)], rules)
        for check in checks:
            check.add(view)
    for check in checks:
        check.close()
        wrong += check.wrong
    return wrong, (f"{len(shapes)} posts, {len(out_files)} layers ({untouched.kept} untouched), "
                   f"largest carried distance {held.largest:.3f} mm ({held.near} layers have it "
                   f"over the reach before the tolerance), closest shaft {clear.closest:.3f} mm")


def arguments():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("raw", nargs="?")
    parser.add_argument("out", nargs="?")
    parser.add_argument("--dense-debt", required=True, help="the program built from dense_debt.c")
    parser.add_argument("--pixel-um", type=float, nargs=2)
    for name in ("layer-um", "reach-mm", "angle-deg", "clearance-mm", "tip-mm"):
        parser.add_argument("--" + name, type=float)
    parser.add_argument("--intent-level", type=float, default=0.5)
    parser.add_argument("--self-test", action="store_true")
    options = parser.parse_args()
    if not options.self_test and any(v is None for v in vars(options).values()):
        parser.error("needs RAW, OUT and every rule, or --self-test")
    return options


def main():
    options = arguments()
    if options.self_test:
        from prop_self_test import self_test
        wrong, figures = self_test(options.dense_debt), "self-test"
    else:
        rules = Rules(tuple(um / 1000 for um in options.pixel_um), options.layer_um / 1000,
                      options.reach_mm, options.angle_deg, options.clearance_mm, options.tip_mm,
                      options.intent_level)
        wrong, figures = judge(options.raw, options.out, rules, options.dense_debt)
    for line in wrong[:60]:
        print(line)
    print(f"check_prop: {figures}: " + (f"{len(wrong)} faults" if wrong else "holds"))
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
