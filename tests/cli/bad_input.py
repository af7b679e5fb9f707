#!/usr/bin/python3
"""Bad input of every kind gets one clear line, the documented exit status, and leaves nothing behind."""
import json
import subprocess

import numpy as np

import stage
from stage import CARDS, GATE, POSTS, STACK, Sandbox, listing, png_bytes, volume


class Usage(Sandbox):
    def test_words(self):
        self.refused(2, "no command")
        self.refused(2, "unknown command", "fly")
        self.refused(2, "stack", "survey")
        self.refused(2, "--job", "survey", "raw")
        self.refused(2, "--out", "prop", "raw", "--job", "job.yaml")
        self.refused(2, "unknown option", "survey", "raw", "--job", "job.yaml", "--posts", "x")
        self.refused(2, "without a value", "survey", "raw", "--job")
        self.refused(2, "twice", "survey", "raw", "--job", "a", "--job", "b")
        self.refused(2, "more than one stack", "survey", "raw", "raw", "--job", "job.yaml")
        for word in ("0", "-1", "two", "99999", "1x", ""):
            self.refused(2, "--threads", "survey", "raw", "--job", "job.yaml", "--threads", word)

    def test_help_fits_a_screen(self):
        for command in ("begin", "survey", "prop", "recheck"):
            run = self.run_it(command, "--help")
            self.assertEqual(run.returncode, 0)
            lines = run.stdout.splitlines()
            self.assertTrue(5 < len(lines) <= 24, len(lines))
            self.assertTrue(all(len(line) <= 84 for line in lines))


class Job(Sandbox):
    def job_says(self, says, text):
        self.refused(2, says, "survey", "raw", "--job", self.write("bad.yaml", text))

    def test_job(self):
        self.refused(2, "nowhere.yaml", "survey", "raw", "--job", "nowhere.yaml")
        self.job_says("did you mean layer_um", "stack: {pixel_um: [50, 50], layer_mm: 50}\n")
        self.job_says("pixel_um", "stack: {pixel_um: [0, 50], layer_um: 50}\n")
        self.job_says("pixel_um", "stack: {pixel_um: [50um, 50], layer_um: 50}\n")
        self.job_says("layer_um", "stack: {pixel_um: [50, 50]}\n")
        self.job_says("bad.yaml:2", "stack: {pixel_um: [50, 50], layer_um: 50}\nsurprise: 1\n")
        self.job_says("lean_deg", STACK + POSTS.replace("lean_deg: 30", "lean_deg: 300"))

    def test_cards(self):
        self.write("resin.yaml", stage.RESIN + "smell: strong\n")
        self.refused(2, "smell", "survey", "raw", "--job", "job.yaml")
        self.write("resin.yaml", stage.RESIN.replace("exposure_mJ_cm2: 38", "exposure_mJ_cm2: 10"))
        self.refused(2, "cannot cure", "survey", "raw", "--job", "job.yaml")
        self.write("resin.yaml", stage.RESIN)
        self.write("machine.yaml", stage.MACHINE.replace("mode: pull", "mode: shove"))
        self.refused(2, "none of pull|tilt", "survey", "raw", "--job", "job.yaml")
        self.write("machine.yaml", stage.MACHINE.replace("mode: pull", "mode: tilt"))
        self.refused(2, "hinge_mm", "survey", "raw", "--job", "job.yaml")
        across = "mode: tilt, hinge_mm: [[0.5, 0], [0.5, 9]]"
        self.write("machine.yaml", stage.MACHINE.replace("mode: pull", across))
        self.refused(2, "crosses the image", "survey", "raw", "--job", "job.yaml")

    def test_what_prop_and_recheck_need(self):
        no_posts = self.write("a.yaml", STACK + CARDS + GATE)
        self.refused(2, "posts", "prop", "raw", "--job", no_posts, "--out", "out")
        no_cards = self.write("b.yaml", STACK + POSTS + GATE)
        self.refused(2, "cards", "prop", "raw", "--job", no_cards, "--out", "out")
        self.refused(2, "cards", "recheck", "raw", "--job", no_cards)


class Stack(Sandbox):
    def stack_says(self, says, status=2):
        for command in (("survey",), ("prop", "--out", "out")):
            self.refused(status, says, command[0], "raw", "--job", "job.yaml", *command[1:])

    def layer(self, n):
        return self.raw / f"layer_{n:04d}.png"

    def test_folder(self):
        self.refused(2, "nowhere", "survey", "nowhere", "--job", "job.yaml")
        (self.folder / "empty").mkdir()
        self.refused(2, "empty", "survey", "empty", "--job", "job.yaml")
        self.refused(2, "job.yaml", "survey", "job.yaml", "--job", "job.yaml")

    def test_missing_number(self):
        self.layer(7).unlink()
        self.stack_says("layer_0008.png")

    def test_number_twice(self):
        (self.raw / "layer_007.png").write_bytes(self.layer(7).read_bytes())
        self.stack_says("layer_0")

    def test_other_size(self):
        self.layer(9).write_bytes(png_bytes(np.zeros((90, 121), np.uint8)))
        self.stack_says("layer_0009.png")

    def test_other_depth(self):
        self.layer(9).write_bytes(png_bytes(np.zeros((90, 120), np.uint16), depth=16))
        self.stack_says("layer_0009.png")

    def test_truncated(self):
        whole = self.layer(9).read_bytes()
        for size in (0, 7, 20, len(whole) // 2, len(whole) - 5):
            self.layer(9).write_bytes(whole[:size])
            self.stack_says("layer_0009.png")

    def test_damaged(self):
        whole = bytearray(self.layer(9).read_bytes())
        whole[len(whole) // 2] ^= 0x10
        self.layer(9).write_bytes(bytes(whole))
        self.stack_says("layer_0009.png")

    def test_colour(self):
        rgb = np.zeros((90, 120 * 3), np.uint8).reshape(90, 120, 3)
        self.layer(9).write_bytes(png_bytes(rgb, colour=2))  # grey all the same
        self.assertEqual(self.run_it("survey", "raw", "--job", "job.yaml").returncode, 0)
        rgb[40, 50] = (255, 0, 0)
        self.layer(9).write_bytes(png_bytes(rgb, colour=2))
        self.stack_says("layer_0009.png")

    def test_alpha_and_interlace(self):
        self.layer(9).write_bytes(png_bytes(np.zeros((90, 120, 2), np.uint8), colour=4))
        self.stack_says("layer_0009.png")
        self.layer(9).write_bytes(png_bytes(np.zeros((90, 120), np.uint8), interlace=1))
        self.stack_says("layer_0009.png")

    def test_not_a_picture(self):
        self.layer(9).write_text("hello")
        self.stack_says("layer_0009.png")

    def test_all_black(self):
        for n in range(1, 41):
            self.layer(n).write_bytes(png_bytes(np.zeros((90, 120), np.uint8)))
        self.refused(2, "nothing in the stack is solid", "prop", "raw", "--job", "job.yaml", "--out",
                     "out")

    def test_black_layer_in_the_middle(self):
        self.layer(15).write_bytes(png_bytes(np.zeros((90, 120), np.uint8)))
        run = self.run_it("prop", "raw", "--job", "job.yaml", "--out", "out", "--json")
        self.assertEqual(run.returncode, 1, run.stderr)
        report = json.loads(run.stdout)
        gaps = [f for f in report["findings"] if f["kind"] == "gap-layer"]
        self.assertEqual([(f["layer"], f["count"], f["severity"]) for f in gaps],
                         [(14 + report["raw"]["lift_layers"], 1, "fail")])
        self.assertTrue((self.folder / "out/refused").is_dir())
        self.assertFalse((self.folder / "out/layers").exists())

    def test_solid_on_the_border_is_a_warning(self):
        v = volume()
        v[:, 0:4, 20:60] = 255
        for n in range(40):
            self.layer(n + 1).write_bytes(png_bytes(v[n]))
        report = json.loads(self.run_it("survey", "raw", "--job", "job.yaml", "--json").stdout)
        border = [f for f in report["findings"] if f["kind"] == "border-solid"]
        self.assertEqual([f["severity"] for f in border], ["warn"])


class Machine(Sandbox):
    """Stdout that cannot be written, places that cannot be written to."""

    def test_full_stdout(self):
        with open("/dev/full", "w") as full:
            self.refused(3, "stdout", "survey", "raw", "--job", "job.yaml", stdout=full)
        with open("/dev/full", "w") as full:
            self.refused(3, "", "survey", "raw", "--job", "job.yaml", "--json", stdout=full)

    def test_closed_stdout(self):
        run = subprocess.run(["sh", "-c", '"$0" survey raw --job job.yaml >&-', stage.FALSEWORK],
                             cwd=self.folder, stderr=subprocess.PIPE, text=True)
        self.assertEqual(run.returncode, 3, run.stderr)
        self.assertEqual(len(run.stderr.splitlines()), 1, run.stderr)

    def test_unwritable_output(self):
        self.refused(2, "job.yaml", "prop", "raw", "--job", "job.yaml", "--out", "job.yaml/out")
        self.refused(2, "nowhere", "prop", "raw", "--job", "job.yaml", "--out", "nowhere/out")
        before = listing(self.folder)
        run = self.run_it("prop", "raw", "--job", "job.yaml", "--out", "/proc/out")
        self.assertIn(run.returncode, (2, 3), run.stderr)
        self.assertEqual(len(run.stderr.splitlines()), 1, run.stderr)
        self.assertEqual(listing(self.folder), before)

    def test_begin_never_overwrites(self):
        self.refused(2, "exists", "begin", "raw", "--out", "job.yaml")
        self.assertEqual(self.run_it("begin", "raw", "--out", "new.yaml").returncode, 0)
        self.assertEqual(self.run_it("survey", "raw", "--job", "new.yaml").returncode, 0)


class Posts(Sandbox):
    def test_posts_file(self):
        out = self.prop()
        good = json.loads((out / "posts.json").read_text())

        def says(text, what):
            path = self.write("bad.json", text if isinstance(text, str) else json.dumps(text))
            self.refused(2, what, "recheck", out / "layers", "--job", "job.yaml", "--posts", path)
        self.refused(2, "nowhere", "recheck", out / "layers", "--job", "job.yaml", "--posts",
                     "nowhere.json")
        says("", "bad.json")
        says("{", "bad.json")
        says("[]", "bad.json")
        says({**good, "format": "another/1"}, "format")
        says({**good, "surprise": 1}, "surprise")
        says({**good, "posts": [{**good["posts"][0], "tip_mm": -1}]}, "tip_mm")
        says({**good, "posts": [{**good["posts"][0], "tip_mm": "big"}]}, "tip_mm")
        says('{"format": 1, "format": 2}', "bad.json")

    def test_another_raw_stack(self):
        out = self.prop()
        other = volume()
        other[20, 35, 25] = 254
        self.write_stack(self.folder / "other", other)
        self.refused(2, "another raw stack", "recheck", out / "layers", "--job", "job.yaml", "--posts",
                     out / "posts.json", "--raw", "other")
        self.write_stack(self.folder / "short", volume()[:20])
        self.refused(2, "short", "recheck", out / "layers", "--job", "job.yaml", "--posts",
                     out / "posts.json", "--raw", "short")


if __name__ == "__main__":
    stage.main()
