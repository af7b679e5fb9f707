"""Reading and writing folders of grey PNG masks for the tests, with OpenCV and nothing of the
project's own."""
import re
import sys
from pathlib import Path

import cv2
import numpy as np


def write_mask(path, mask):
    """Writes mask [height][width] of uint8 as an 8-bit grey PNG."""
    if not cv2.imwrite(str(path), mask):
        sys.exit(f"stack_io: could not write, {path}, name a folder that can be written")


def layer_files(folder):
    """The PNGs of a folder, ordered by the last number in their names."""
    numbered = [(int(re.findall(r"\d+", f.name)[-1]), f) for f in Path(folder).glob("*.png")
                if re.search(r"\d", f.name)]
    if not numbered:
        sys.exit(f"stack_io: no layers, {folder}, name a folder of PNGs with a number in each name")
    return [f for _, f in sorted(numbered)]


def read_mask(path):
    """Grey values [height][width], 255 = full grey (8 bits as they are, 16 bits as a float)."""
    grey = cv2.imread(str(path), cv2.IMREAD_UNCHANGED)
    if grey is None or grey.ndim != 2:
        sys.exit(f"stack_io: not a grey PNG, {path}, give a stack of grey masks")
    return grey if grey.dtype == np.uint8 else grey / 257.0


def intended(grey, level=0.5):
    """Pixels whose share of full grey reaches the intent level."""
    return grey >= level * 255.0
