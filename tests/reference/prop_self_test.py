"""Shows that every check of check_prop.py can fail: a small supported stack that holds, then the same
with one thing broken at a time."""
import copy
import json
import shutil
import tempfile
from pathlib import Path

import check_prop
import numpy as np
from post_shape import Shape, paint
from prop_checks import Rules
from stack_io import write_mask

PIXEL, LAYER, LIFT, LAYERS = 0.1, 0.1, 10, 16
RULES = Rules((PIXEL, PIXEL), LAYER, 1.0, 45.0, 0.3, 0.3, 0.5)


def raw_stack():
    """A table of 3.6 x 3.6 mm, 0.4 mm thick, and on its middle a cup with a mouth toward the vat. 16
    layers of 60 x 60."""
    layers = np.zeros((LAYERS, 60, 60), np.uint8)
    layers[0:4, 12:48, 12:48] = 255
    layers[4:12, 22:38, 22:38] = 255
    layers[5:9, 26:34, 26:34] = 0    # a chamber with a floor and a roof
    layers[6, 29:31, 34:38] = 0      # and a duct of 2 pixels to the vat
    return layers


def post(number, x, y, tip_layer=LIFT):
    return {"id": number, "locked": False, "routed": True, "tip_layer": tip_layer,
            "raw_tip_layer": tip_layer - LIFT, "bite_layers": 1,
            "path_mm": [[x, y, tip_layer * LAYER], [x, y, 0.0]], "tip_mm": 0.4, "neck_mm": 0.3,
            "shaft_mm": 0.5, "foot_mm": 0.7}


def stamp(raw, posts):
    layers = np.concatenate([np.zeros((LIFT, *raw.shape[1:]), np.uint8), raw])
    for shape in (Shape(p, LAYER) for p in posts):
        for n in range(shape.end):
            mask = np.zeros(layers.shape[1:], bool)
            paint(mask, shape.centre(n), shape.radius(n), (PIXEL, PIXEL))
            layers[n][mask] = 255
    return layers


def write_stack(folder, layers):
    folder.mkdir(parents=True)
    for n, layer in enumerate(layers):
        write_mask(folder / f"layer_{n + 1:04d}.png", layer)


def write_sums(path, base, files):
    path.write_text("".join(f"{check_prop.sha256(f)}  {f.relative_to(base)}\n" for f in files))


class Case:
    """A raw stack, its posts and the written layers; breakers change them before or after writing."""

    def __init__(self):
        self.raw = raw_stack()
        places = [(x, y) for x in (1.8, 3.0, 4.2) for y in (1.8, 3.0, 4.2)]
        self.posts = [post(n, x, y) for n, (x, y) in enumerate(places)]
        self.layers = stamp(self.raw, self.posts)

    def write(self, folder, after=None):
        raw, out = folder / "raw", folder / "out"
        write_stack(raw, self.raw)
        write_stack(out / "layers", self.layers)
        for n in range(LAYERS):
            if np.array_equal(self.layers[n + LIFT], self.raw[n]):
                shutil.copy(raw / f"layer_{n + 1:04d}.png",
                            out / f"layers/layer_{n + LIFT + 1:04d}.png")
        files = sorted(raw.iterdir())
        listing = {"format": "falsework-posts/1", "lift_layers": LIFT, "posts": self.posts,
                   "raw_sha256": check_prop.stack_sha256(files)}
        (out / "posts.json").write_text(json.dumps(listing))
        write_sums(out / "INPUT-SHA256SUMS", raw, files)
        if after:
            after(raw, out)
        write_sums(out / "SHA256SUMS", out, sorted(f for f in out.rglob("*") if f.is_file()))
        return raw, out


def drop_posts(case):
    case.posts = case.posts[:4] + case.posts[6:7]
    case.layers = stamp(case.raw, case.posts)


def lower(case):
    case.layers[LIFT + 2, 20, 20] = 254


def stray(case):
    case.layers[3, 5, 5] = 255


def cut_shaft(case):
    for n in (3, 4):
        case.layers[n] = 0


def foreign_onset(case):
    case.raw[6:8, 50:55, 50:55] = 255
    case.layers = stamp(case.raw, case.posts)


def beside_wall(case):
    """A post that passes a wall within its clearance on the way to a tip above it."""
    case.raw[0:4, 12:48, 48:52] = 255
    case.raw[8:12, 22:38, 38:58] = 255
    case.posts = case.posts + [post(9, 5.5, 3.0, LIFT + 8)]
    case.layers = stamp(case.raw, case.posts)


def plug(case):
    """A tip whose circle fills the duct: the chamber is closed."""
    case.posts = case.posts + [post(9, 3.6, 3.0, LIFT + 6)]
    case.layers = stamp(case.raw, case.posts)


def unrouted(case):
    case.posts = copy.deepcopy(case.posts)
    case.posts[2]["routed"] = False


def encode_anew(_, out):
    file = out / f"layers/layer_{LIFT + 10:04d}.png"
    bare = file.read_bytes()
    chunk = b"\0\0\0\4tEXta\0bc"
    import zlib
    file.write_bytes(bare[:33] + chunk + zlib.crc32(chunk[4:]).to_bytes(4, "big") + bare[33:])


def change_input(raw, _):
    file = sorted(raw.iterdir())[-1]
    file.write_bytes(file.read_bytes() + b"\0")


BROKEN = [("overreach", drop_posts, None), ("lowered", lower, None), ("outside", stray, None),
          ("adrift", cut_shaft, None), ("onset", foreign_onset, None),
          ("clearance", beside_wall, None), ("sealed", plug, None),
          ("does not reach the plate", unrouted, None), ("encoded anew", None, encode_anew),
          ("digest: input", None, change_input)]


def run(before, after, program, spoil=None):
    with tempfile.TemporaryDirectory() as name:
        case = Case()
        if before:
            before(case)
        raw, out = case.write(Path(name), after)
        if spoil:
            spoil(out)
        return check_prop.judge(raw, out, RULES, program)[0]


def self_test(program):
    wrong = [f"the sound stack: {line}" for line in run(None, None, program)]
    for word, before, after in BROKEN:
        found = run(before, after, program)
        if not any(word in line for line in found):
            wrong.append(f"'{word}' was not found; instead: {found[:3]}")
    for spoil, word in ((lambda out: (out / "stranger").write_text("x"), "not in SHA256SUMS"),
                        (lambda out: (out / "posts.json").open("a").write("\n"), "differs")):
        if not any(word in line for line in run(None, None, program, spoil)):
            wrong.append(f"'{word}' was not found")
    return wrong
