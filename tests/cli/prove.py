#!/usr/bin/python3
"""falsework prove: exit status, the columns of the table, JSON, bad arguments, a stdout that is closed."""
import json
import re
import subprocess

import stage
from stage import Sandbox

ROW = re.compile(r"(?P<id>[A-Z]\d+(\.\d+)?) +(?P<what>\S.*?) +(?P<value>\d+/\d+) +(?P<expected>\S+) +"
                 r"(?P<computed>\S+) +(?P<error>\S+) +(?P<allowed>\S+) (?P<kind>rel|abs|top) +"
                 r"(?P<holds>pass|FAIL)  (?P<source>\S.*)")
LEFT_OUT = re.compile(r"(?P<id>[A-Z]\d+(\.\d+)?) +(?P<what>\S.*?)( +-){6} +not computed here: \S.*")


class Prove(Sandbox):
    def test_table(self):
        run = self.run_it("prove")
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        head, *lines, last = run.stdout.splitlines()
        self.assertEqual(head.split(), ["check", "what", "value", "expected", "computed", "error",
                                        "allowed", "source"])
        rows = [ROW.fullmatch(line) for line in lines]
        left_out = [line for line, row in zip(lines, rows) if row is None]
        self.assertTrue(all(LEFT_OUT.fullmatch(line) for line in left_out), left_out)
        rows = [row.groupdict() for row in rows if row is not None]
        self.assertGreater(len(rows), 100)
        self.assertEqual(last, f"{len(rows)} checks: {len(rows)} pass, 0 fail; {len(left_out)} more are "
                               "not computed here.")
        ids = [line.split()[0] for line in lines]
        self.assertEqual(len(set(ids)), len(ids))
        for row in rows:
            self.assertEqual(row["holds"], "pass")
            self.assertLessEqual(float(row["error"]), float(row["allowed"]), row)
            self.check_error(row)

    def check_error(self, row):
        """The printed numbers bear the printed error out, as far as their ten digits go."""
        expected, computed = float(row["expected"]), float(row["computed"])
        off = computed - expected if row["kind"] == "top" else abs(computed - expected)
        scale = 1 if row["kind"] == "abs" else abs(expected)
        self.assertAlmostEqual(off / scale, float(row["error"]), delta=2e-9 + 0.06 * abs(
            float(row["error"])), msg=row)

    def test_json(self):
        run = self.run_it("prove", "--json", "--threads", 1)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        found = json.loads(run.stdout)
        self.assertEqual(found["format"], "falsework-prove/1")
        computed = [c for c in found["checks"] if c["kind"] != "not-computed"]
        self.assertEqual((found["passed"], found["failed"]), (len(computed), 0))
        self.assertEqual(found["not_computed"], len(found["checks"]) - len(computed))
        for check in computed:
            self.assertEqual(len(check["expected"]), len(check["computed"]))
            self.assertTrue(0 <= check["worst"] < len(check["expected"]))
            self.assertTrue(check["passed"] and check["error"] <= check["tolerance"])
            self.assertTrue(check["what"] and check["source"])
        disc = next(c for c in computed if c["id"] == "S1.1")
        self.assertAlmostEqual(disc["computed"][0], 23.5619449019, delta=1e-9)
        self.assertTrue(all(c["reason"] for c in found["checks"] if c not in computed))

    def test_bad_arguments(self):
        self.refused(2, "takes no stack", "prove", "raw")
        self.refused(2, "unknown option --job", "prove", "--job", "job.yaml")
        self.refused(2, "unknown option --batch", "prove", "--batch", "3")
        self.refused(2, "--threads", "prove", "--threads", "0")
        self.refused(2, "without a value", "prove", "--threads")

    def test_help_fits_a_screen(self):
        run = self.run_it("prove", "--help")
        self.assertEqual(run.returncode, 0)
        lines = run.stdout.splitlines()
        self.assertTrue(5 < len(lines) <= 24, len(lines))
        self.assertTrue(all(len(line) <= 84 for line in lines))
        self.assertIn("falsework prove ", self.run_it("--help").stdout)

    def test_closed_stdout(self):
        run = subprocess.run(["sh", "-c", '"$0" prove >&-', stage.FALSEWORK], cwd=self.folder,
                             stderr=subprocess.PIPE, text=True)
        self.assertEqual(run.returncode, 3, run.stderr)
        self.assertEqual(len(run.stderr.splitlines()), 1, run.stderr)
        self.assertIn("stdout", run.stderr)


if __name__ == "__main__":
    stage.main()
