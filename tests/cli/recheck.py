#!/usr/bin/python3
"""Recheck believes the masks alone: it passes what prop wrote and sees every kind of damage."""
import json
from pathlib import Path

import numpy as np

import stage
from stage import Sandbox, png_bytes

import jsonschema
import png

SCHEMAS = Path(__file__).resolve().parents[2] / "src/report"


def read(path):
    width, height, rows, _ = png.Reader(bytes=path.read_bytes()).read()
    return np.array([list(row) for row in rows], np.uint8).reshape(height, width)


class Recheck(Sandbox):
    def setUp(self):
        super().setUp()
        self.out = self.prop()
        self.posts = json.loads((self.out / "posts.json").read_text())["posts"]
        self.files = sorted((self.out / "layers").iterdir())

    def recheck(self, *more):
        run = self.run_it("recheck", self.out / "layers", "--job", self.job, "--posts",
                          self.out / "posts.json", "--raw", self.raw, "--json", *more)
        self.assertEqual(run.stderr, "")
        return run.returncode, json.loads(run.stdout)

    def kinds(self, report, severity="fail"):
        return {f["kind"] for f in report["findings"] if f["severity"] == severity}

    def change(self, layer, edit):
        pixels = read(self.files[layer])
        edit(pixels)
        self.files[layer].write_bytes(png_bytes(pixels))

    def erase(self, post, layers):
        """Darkens the post's own circle in these layers."""
        ys, xs = np.mgrid[0:90, 0:120]
        x, y, _ = post["path_mm"][0]
        near = np.hypot((xs + 0.5) * 0.1 - x, (ys + 0.5) * 0.1 - y) < 1.5
        for n in layers:
            self.change(n, lambda pixels: np.putmask(pixels, near, 0))

    def test_same_report(self):
        status, report = self.recheck()
        self.assertEqual(status, 0)
        self.assertEqual(report, json.loads((self.out / "report.json").read_text()))

    def test_written_files_follow_their_schemas(self):
        schemas = {name: json.loads((SCHEMAS / f"{name}.schema.json").read_text())
                   for name in ("report", "posts")}
        store = {schema["$id"]: schema for schema in schemas.values()}
        for name, schema in schemas.items():
            written = json.loads((self.out / f"{name}.json").read_text())
            check = jsonschema.Draft202012Validator(
                schema, resolver=jsonschema.RefResolver.from_schema(schema, store=store))
            check.validate(written)
            del written["format"]
            self.assertFalse(check.is_valid(written))

    def test_without_posts_everything_is_part(self):
        run = self.run_it("recheck", self.out / "layers", "--job", self.job, "--json")
        report = json.loads(run.stdout)
        self.assertEqual(len(report["posts"]), 0)
        self.assertEqual(report["totals"]["support_volume_mm3"], 0)

    def test_lowered_pixel(self):
        lift = json.loads((self.out / "report.json").read_text())["raw"]["lift_layers"]
        self.change(lift + 20, lambda p: p.__setitem__((45, 22), 254))
        status, report = self.recheck()
        self.assertEqual((status, self.kinds(report)), (1, {"altered-part"}))

    def test_raised_pixel(self):
        lift = json.loads((self.out / "report.json").read_text())["raw"]["lift_layers"]
        self.change(lift + 20, lambda p: p.__setitem__((80, 110), 10))
        status, report = self.recheck()
        self.assertEqual((status, self.kinds(report)), (1, {"altered-part"}))

    def test_every_post_that_loses_its_tip_is_named(self):
        self.assertGreater(len(self.posts), 3)
        kept = {file: file.read_bytes() for file in self.files}
        for post in self.posts:
            self.erase(post, range(post["tip_layer"] - 3, post["tip_layer"]))
            status, report = self.recheck()
            self.assertEqual(status, 1)
            stubs = {f["post"] for f in report["findings"] if f["kind"] == "stub"}
            self.assertIn(post["id"], stubs)
            for file, data in kept.items():
                file.write_bytes(data)

    def test_broken_shaft(self):
        post = self.posts[-1]
        self.erase(post, [5])
        status, report = self.recheck()
        self.assertEqual(status, 1)
        self.assertIn("stub", self.kinds(report))

    def test_weaker_resin_and_faster_machine(self):
        weak = self.write("weak.yaml", stage.RESIN.replace("tensile_MPa: 8.0", "tensile_MPa: 0.05"))
        status, report = self.recheck("--resin", weak)
        self.assertEqual(status, 1)
        self.assertIn("tip-overload", self.kinds(report))
        fast = self.write("fast.yaml", stage.MACHINE.replace("speed_mm_s: 1.0", "speed_mm_s: 2.0"))
        before = json.loads((self.out / "report.json").read_text())["totals"]["peak_peel_N"]
        _, report = self.recheck("--machine", fast)
        self.assertAlmostEqual(report["totals"]["peak_peel_N"] / before, 2, places=2)


if __name__ == "__main__":
    stage.main()
