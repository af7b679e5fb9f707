#!/usr/bin/python3
"""The same bytes come out for any number of threads, any batch, memo on or off, store in memory or in a
file; and every file is decoded as often as the design says."""
import re

import stage
from stage import Sandbox, listing

# All pairs of values stand together in some run.
RUNS = [(1, 1, 0, 0), (1, 5, 96, 96), (1, 16, 0, 96), (2, 1, 96, 96), (2, 5, 0, 0), (2, 16, 96, 0),
        (3, 1, 0, 96), (3, 5, 96, 0), (3, 16, 0, 0), (8, 1, 96, 0), (8, 5, 0, 96), (8, 16, 96, 96)]


class SameBytes(Sandbox):
    def arguments(self, run):
        threads, batch, memo, store = run
        return ("--threads", threads, "--batch", batch, "--memo-mib", memo, "--store-mib", store)

    def test_prop(self):
        first = None
        for run in RUNS:
            out = self.prop("--replace", *self.arguments(run))
            found = listing(out)
            first = found if first is None else first
            self.assertEqual(found, first, f"threads, batch, memo, store = {run}")

    def test_survey(self):
        texts = {self.run_it("survey", "raw", "--job", "job.yaml", "--json",
                             *self.arguments(run)).stdout for run in RUNS}
        self.assertEqual(len(texts), 1)
        self.assertGreater(len(texts.pop()), 1000)

    def decodes(self, *arguments):
        run = self.run_it(*arguments, "--verbose")
        self.assertEqual(run.returncode, 0, run.stderr)
        return int(re.search(r"decoded (\d+)", run.stderr).group(1))

    def distinct(self, files):
        """Files that differ from the one before."""
        data = [file.read_bytes() for file in sorted(files)]
        return sum(n == 0 or data[n] != data[n - 1] for n in range(len(data)))

    def test_decodes(self):
        raw = self.distinct(self.raw.iterdir())
        self.assertLess(raw, 40)
        self.assertEqual(self.decodes("survey", "raw", "--job", "job.yaml"), raw)
        count = self.decodes("prop", "raw", "--job", "job.yaml", "--out", "out", "--batch", 1024)
        originals = {file.read_bytes() for file in self.raw.iterdir()}
        written = sorted((self.folder / "out/layers").iterdir())
        changed = [n for n, file in enumerate(written) if file.read_bytes() not in originals]
        anew = sum(n == 0 or written[n].read_bytes() != written[n - 1].read_bytes()
                   for n in changed)
        self.assertLess(len(changed), len(written))
        self.assertEqual(count, raw + anew)


if __name__ == "__main__":
    stage.main()
