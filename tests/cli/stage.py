"""What the black-box tests share: a sandbox with a small stack, cards and a job, and a way to run the
command and to say exactly how it must have answered. Standard library and numpy alone."""
import hashlib
import os
import shutil
import struct
import subprocess
import sys
import tempfile
import unittest
import zlib
from pathlib import Path

import numpy as np

FALSEWORK = None  # set by main()

RESIN = """name: test resin (invented values)
viscosity_mPa_s: 350
cure: {penetration_um: 110, critical_mJ_cm2: 9.0, exposure_mJ_cm2: 38}
green: {tensile_MPa: 8.0, modulus_MPa: 250, plate_adhesion_MPa: 0.5}
support: {reach_mm: 1.5, angle_deg: 40}
"""
MACHINE = """name: test machine (invented values)
separation: {mode: pull, speed_mm_s: 1.0, gap_um: 100}
plate: {size_mm: [64, 40]}
"""
POSTS = """posts: {lift_mm: 3, tip_mm: [0.30, 0.80], neck_mm: 1.5, shaft_mm: [0.8, 3.0], foot_mm: 3.0,
  lean_deg: 30, clearance_mm: 0.30, bite_mm: 0.10}
"""
STACK = "stack: {pixel_um: [100, 100], layer_um: 100}\n"
CARDS = "resin: resin.yaml\nmachine: machine.yaml\n"
GATE = "gate: {margin: 2.0}\n"


def png_bytes(pixels, colour=0, depth=8, extra=b"", interlace=0):
    """A PNG file of rows of bytes; colour 0 grey, 2 RGB, 4 grey and alpha."""
    def chunk(name, data):
        body = name + data
        return struct.pack(">I", len(data)) + body + struct.pack(">I", zlib.crc32(body))
    pixels = np.asarray(pixels)
    height, width = pixels.shape[:2]
    header = struct.pack(">IIBBBBB", width, height, depth, colour, 0, 0, interlace)
    raw = b"".join(b"\0" + row.astype(">u2" if depth == 16 else "u1").tobytes() for row in pixels)
    return (b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", header) + extra +
            chunk(b"IDAT", zlib.compress(raw, 1)) + chunk(b"IEND", b""))


def volume():
    """40 layers of 120 x 90: a block on the first layers' place, a ledge, an island that joins it, a
    cup, grey rims."""
    v = np.zeros((40, 90, 120), np.uint8)
    v[:, 30:60, 20:60] = 255
    v[:, 30, 20:60] = 128
    v[:, 29, 20:60] = 90          # below the intent level
    v[18:24, 40:50, 60:90] = 255  # a ledge of 3 mm
    v[10:24, 42:48, 84:90] = 255  # begins in mid-resin, holds the ledge's end
    v[5:40, 40:50, 30:45] = 0     # a blind hole, closed toward the plate
    return v


def listing(folder):
    """Every file under folder with its digest, every folder."""
    found = {}
    for path in sorted(Path(folder).rglob("*")):
        name = str(path.relative_to(folder))
        found[name] = hashlib.sha256(path.read_bytes()).hexdigest() if path.is_file() else "folder"
    return found


class Sandbox(unittest.TestCase):
    def setUp(self):
        self.folder = Path(tempfile.mkdtemp())
        self.addCleanup(shutil.rmtree, self.folder, ignore_errors=True)
        self.raw = self.folder / "raw"
        self.write_stack(self.raw, volume())
        self.write("resin.yaml", RESIN)
        self.write("machine.yaml", MACHINE)
        self.job = self.write("job.yaml", STACK + CARDS + POSTS + GATE)

    def write(self, name, text):
        path = self.folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text)
        return path

    def write_stack(self, folder, layers, first=1):
        folder.mkdir(parents=True)
        for n, layer in enumerate(layers):
            (folder / f"layer_{n + first:04d}.png").write_bytes(png_bytes(layer))

    def run_it(self, *arguments, **options):
        options.setdefault("cwd", self.folder)
        options.setdefault("stdout", subprocess.PIPE)
        return subprocess.run([FALSEWORK, *map(str, arguments)], stderr=subprocess.PIPE, text=True,
                              timeout=300, **options)

    def refused(self, status, says, *arguments, stdout_empty=True, **options):
        """One line on stderr with `says` in it, this status, an empty stdout, nothing left behind."""
        before = listing(self.folder)
        run = self.run_it(*arguments, **options)
        self.assertEqual(run.returncode, status, run.stderr)
        self.assertEqual(len(run.stderr.splitlines()), 1, run.stderr)
        self.assertTrue(run.stderr.startswith("falsework: "), run.stderr)
        self.assertIn(says, run.stderr)
        if stdout_empty and run.stdout is not None:
            self.assertEqual(run.stdout, "")
        self.assertEqual(listing(self.folder), before)
        return run

    def prop(self, *more, status=0):
        run = self.run_it("prop", self.raw, "--job", self.job, "--out", self.folder / "out", *more)
        self.assertEqual(run.returncode, status, run.stdout + run.stderr)
        return self.folder / "out"


def main():
    global FALSEWORK
    FALSEWORK = os.path.abspath(sys.argv.pop(1))
    sys.modules["stage"].FALSEWORK = FALSEWORK
    unittest.main(verbosity=2)
