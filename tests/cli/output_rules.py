#!/usr/bin/python3
"""The output folder appears whole or not at all, and nothing that was there before is harmed."""
import json
import os
import signal
import subprocess
import time

import stage
from stage import CARDS, GATE, POSTS, STACK, Sandbox, listing


class Rules(Sandbox):
    def no(self, says, out, *more):
        before = listing(self.raw)
        self.refused(2, says, "prop", "raw", "--job", "job.yaml", "--out", out, *more)
        self.assertEqual(listing(self.raw), before)

    def test_not_the_stack(self):
        os.symlink("raw", self.folder / "link")
        for out in ("raw", "raw/", "./raw", "link", "raw/inside", "link/inside", "raw/../raw"):
            self.no("", out)
            self.no("", out, "--replace")

    def test_not_above_the_stack(self):
        deep = self.folder / "deep/down"
        deep.mkdir(parents=True)
        self.raw.rename(deep / "raw")
        for more in ((), ("--replace",)):
            self.refused(2, "", "prop", "deep/down/raw", "--job", "job.yaml", "--out", "deep", *more)

    def test_not_here_nor_the_job(self):
        self.no("", ".")
        self.no("", "..", "--replace")
        (self.folder / "jobs").mkdir()
        for name in ("job.yaml", "resin.yaml", "machine.yaml"):
            (self.folder / name).rename(self.folder / "jobs" / name)
        for more in ((), ("--replace",)):
            self.refused(2, "", "prop", "raw", "--job", "jobs/job.yaml", "--out", "jobs", *more)

    def test_not_a_card_s_folder(self):
        (self.folder / "cards").mkdir()
        (self.folder / "resin.yaml").rename(self.folder / "cards/resin.yaml")
        self.write("job.yaml", STACK + CARDS.replace("resin.yaml", "cards/resin.yaml") + POSTS + GATE)
        self.no("", "cards", "--replace")

    def test_not_what_exists(self):
        (self.folder / "out").mkdir()
        self.no("out", "out")
        self.write("out/mine.txt", "precious")
        self.no("out", "out")
        self.no("", "out", "--replace")
        self.write("file", "precious")
        self.no("file", "file", "--replace")

    def test_replace_only_our_own(self):
        out = self.prop()
        self.no("out", "out")
        first = listing(out)
        self.assertEqual(self.prop("--replace"), out)
        self.assertEqual(listing(out), first)
        stranger = out / "layers/mine.txt"
        stranger.write_text("precious")
        self.no("mine.txt", "out", "--replace")
        stranger.unlink()
        sums = (out / "SHA256SUMS").read_text().splitlines()
        (out / "SHA256SUMS").write_text("\n".join(sums[1:]) + "\n")
        self.no("", "out", "--replace")

    def test_digests(self):
        out = self.prop()
        self.assertEqual(subprocess.run(["sha256sum", "-c", "--quiet", "SHA256SUMS"],
                                        cwd=out).returncode, 0)
        self.assertEqual(subprocess.run(["sha256sum", "-c", "--quiet",
                                         str(out / "INPUT-SHA256SUMS")], cwd=self.raw).returncode, 0)
        listed = {line.split("  ", 1)[1] for line in (out / "SHA256SUMS").read_text().splitlines()}
        there = {n for n, kind in listing(out).items() if kind != "folder"}
        self.assertEqual(listed, there - {"SHA256SUMS"})

    def test_refused_never_looks_finished(self):
        self.write("job.yaml", STACK + CARDS + POSTS + "gate: {margin: 2.0, max_peel_N: 0.001}\n")
        out = self.prop(status=1)
        self.assertTrue((out / "refused").is_dir())
        self.assertFalse((out / "layers").exists())
        self.assertEqual(json.loads((out / "report.json").read_text())["verdict"], "fail")

    def test_survey_writes_the_report_alone(self):
        run = self.run_it("survey", "raw", "--job", "job.yaml", "--out", "seen")
        self.assertEqual(run.returncode, 0, run.stderr)
        self.assertEqual(sorted(listing(self.folder / "seen")), ["SHA256SUMS", "report.json"])
        self.refused(2, "raw", "survey", "raw", "--job", "job.yaml", "--out", "raw")


class Signals(Sandbox):
    def start(self):
        process = subprocess.Popen([stage.FALSEWORK, "prop", "raw", "--job", "job.yaml", "--out",
                                    "out", "--threads", "1", "--memo-mib", "0"], cwd=self.folder,
                                   stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
        for _ in range(2000):  # until the staging folder is there
            if any(p.name.startswith(".out.part-") for p in self.folder.iterdir()):
                return process
            time.sleep(0.001)
        self.fail("no staging folder was seen: " + process.communicate()[1])

    def stop_with(self, number, status):
        before = listing(self.folder)
        process = self.start()
        process.send_signal(number)
        said = process.communicate(timeout=60)[1]
        self.assertEqual(process.returncode, status, said)
        self.assertEqual(len(said.splitlines()), 1, said)
        self.assertEqual(listing(self.folder), before)

    def test_interrupt_and_terminate(self):
        self.stop_with(signal.SIGINT, 130)
        self.stop_with(signal.SIGTERM, 143)

    def test_kill_leaves_one_staging_folder_that_the_next_run_removes(self):
        process = self.start()
        process.kill()
        process.communicate()
        left = [p.name for p in self.folder.iterdir() if p.name.startswith(".out.part-")]
        self.assertEqual(len(left), 1)
        self.assertFalse((self.folder / "out").exists())
        self.prop()
        self.assertEqual([p.name for p in self.folder.iterdir() if p.name.startswith(".out")], [])


if __name__ == "__main__":
    stage.main()
