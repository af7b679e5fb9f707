"""The checks of a supported stack, layer by layer. Each class has add(view) and close(), and collects
what is wrong in `wrong`. A view is one layer: see View."""
import subprocess
from dataclasses import dataclass

import numpy as np
from bodies import Solid, Void
from post_shape import paint
from scipy import ndimage
from stack_io import intended

OVERESTIMATE = 1.0275  # of a 16-neighbour path, see dense_debt.c
SLACK_PX = 1.5         # the path beside an edge, and the circle's edge against its pixels


@dataclass
class Rules:
    pixel: tuple      # mm
    layer: float      # mm
    reach: float      # mm
    angle: float      # degrees
    clearance: float  # mm
    tip: float        # mm, the smallest
    intent: float     # share of full grey


@dataclass
class View:
    layer: int
    out: np.ndarray        # greys as written
    raw: np.ndarray        # greys of the raw layer here, zero in the lift
    out_file: object
    raw_file: object       # None in the lift
    here: list             # shapes of the posts that this layer has
    rules: Rules

    def discs(self, shapes, grow=0.0):
        """Pixels within the circles of these posts, grown by so many mm."""
        mask = np.zeros(self.out.shape, bool)
        for shape in shapes:
            paint(mask, shape.centre(self.layer), shape.radius(self.layer) + grow, self.rules.pixel)
        return mask


class Altered:
    """No pixel is lowered; none is raised outside the posts' circles (grown by one pixel's diagonal,
    since a rim pixel is raised by the part of it that the circle covers)."""

    def __init__(self):
        self.wrong = []

    def add(self, view):
        lowered = int((view.out < view.raw).sum())
        if lowered:
            self.wrong.append(f"altered: layer {view.layer}, {lowered} pixels lowered")
        raised = view.out > view.raw
        if raised.any():
            stray = int((raised & ~view.discs(view.here, np.hypot(*view.rules.pixel))).sum())
            if stray:
                self.wrong.append(f"altered: layer {view.layer}, {stray} raised outside the posts")

    def close(self):
        pass


class Untouched:
    """A layer in which no pixel changed has the bytes of its raw file."""

    def __init__(self):
        self.wrong, self.kept = [], 0

    def add(self, view):
        if view.raw_file is None or not np.array_equal(view.out, view.raw):
            return
        self.kept += 1
        if view.out_file.read_bytes() != view.raw_file.read_bytes():
            self.wrong.append(f"bytes: layer {view.layer} is unchanged but was encoded anew")

    def close(self):
        pass


class Connected:
    """Nothing is adrift, and no onset holds a disc of the smallest tip. The largest inscribed disc of
    a region is its largest distance to a pixel outside, less half a pixel."""

    def __init__(self):
        self.wrong, self.solid = [], Solid()

    def add(self, view):
        self.solid.add(intended(view.out, view.rules.intent))
        adrift = self.solid.adrift_px()
        small = 0
        for label in self.solid.onsets():
            small += int(self.solid.sizes[label])
            self.check_onset(view, label)
        if adrift > small:
            self.wrong.append(f"adrift: layer {view.layer}, {adrift} pixels")

    def check_onset(self, view, label):
        box = ndimage.find_objects(self.solid.labels == label)[0]
        px, py = view.rules.pixel
        region = np.pad(self.solid.labels[box] == label, 1)
        inside = ndimage.distance_transform_edt(region, sampling=(py, px)).max()
        across = 2 * (inside - max(px, py) / 2)
        if across >= view.rules.tip:
            self.wrong.append(f"onset: layer {view.layer}, {int(self.solid.sizes[label])} pixels, "
                              f"{across:.3f} mm across, at column {box[1].start} row {box[0].start}")

    def close(self):
        pass


class Held:
    """No overreach: the carried distance of dense_debt.c, with layer 0 and the post pixels (within a
    post's circle, in layers before its tip layer) as sources. The reference is never low; a pixel
    fails when even reference / 1.0275 - 1.5 px is beyond the reach."""

    def __init__(self, program, shape, rules):
        credit = rules.layer / np.tan(np.radians(rules.angle))
        self.sure = (rules.reach + SLACK_PX * max(rules.pixel)) * OVERESTIMATE
        arguments = [program, shape[1], shape[0], *rules.pixel, credit, rules.reach, self.sure]
        self.process = subprocess.Popen([str(a) for a in arguments], stdin=subprocess.PIPE,
                                        stdout=subprocess.PIPE, text=False)
        self.wrong, self.near, self.largest = [], 0, 0.0

    def add(self, view):
        solid = intended(view.out, view.rules.intent)
        source = solid if view.layer == 0 else view.discs(
            [s for s in view.here if view.layer < s.tip_layer])
        self.process.stdin.write((solid + 2 * source.astype(np.uint8)).astype(np.uint8).tobytes())
        self.process.stdin.flush()
        layer, over, surely, _, largest, x, y = self.process.stdout.readline().split()
        self.near += int(over) > 0
        self.largest = max(self.largest, float(largest))
        if int(surely):
            self.wrong.append(f"overreach: layer {int(layer)}, {int(surely)} pixels beyond "
                              f"{self.sure:.3f} mm, largest {float(largest):.3f} mm at column "
                              f"{int(x)} row {int(y)}")

    def close(self):
        self.process.stdin.close()
        if self.process.wait():
            self.wrong.append("overreach: dense_debt failed")


class Clear:
    """Shaft and foot keep their clearance from the raw part, in space: hypot of the gap in the plane
    (from the circle to a pixel's centre) and the gap along z (0 in the same layer, one layer less
    than the distance of the layers otherwise). One pixel of tolerance for the raster. The ring holds
    the raw layers around the one that is judged."""

    def __init__(self, shape, rules, shapes):
        self.reach = int(np.ceil(rules.clearance / rules.layer)) + 1
        self.ring = np.zeros((2 * self.reach + 1, *shape), bool)
        self.wrong, self.shapes, self.rules, self.next, self.closest = [], shapes, rules, 0, np.inf

    def add(self, view):
        self.push(intended(view.raw, view.rules.intent))

    def push(self, part):
        self.ring[self.next % len(self.ring)] = part
        self.next += 1
        if self.next > self.reach:
            self.judge(self.next - 1 - self.reach)

    def judge(self, layer):
        for shape in self.shapes:
            if shape.is_free_standing(layer):
                gap = self.gap(shape, layer)
                self.closest = min(self.closest, gap)
                if gap < self.rules.clearance - max(self.rules.pixel):
                    self.wrong.append(f"clearance: post {shape.id}, layer {layer}, {gap:.3f} mm")

    def gap(self, shape, layer):
        (x, y), radius = shape.centre(layer), shape.radius(layer)
        px, py = self.rules.pixel
        span = radius + self.rules.clearance + max(px, py)
        x0, y0 = max(int((x - span) / px), 0), max(int((y - span) / py), 0)
        window = self.ring[:, y0:int((y + span) / py) + 1, x0:int((x + span) / px) + 1]
        slot, row, column = np.nonzero(window)
        if not len(slot):
            return np.inf
        newest = self.next - 1
        its_layer = newest - (newest - slot) % len(self.ring)
        rise = np.maximum(np.abs(its_layer - layer) - 1, 0) * self.rules.layer
        away = np.hypot((column + x0 + 0.5) * px - x, (row + y0 + 0.5) * py - y) - radius
        return float(np.hypot(np.maximum(away, 0), rise).min())

    def close(self):
        for _ in range(self.reach):
            self.push(np.zeros(self.ring.shape[1:], bool))


class Voids:
    """No sealed void that the raw stack, lifted alike, does not have: as many bodies closed on all
    sides, and no more pixels in them."""

    def __init__(self):
        self.wrong, self.out, self.raw = [], Void(), Void()

    def add(self, view):
        self.out.add(intended(view.out, view.rules.intent))
        self.raw.add(intended(view.raw, view.rules.intent))

    def close(self):
        now, before = (void.enclosed() for void in (self.out, self.raw))
        pixels, pixels_before = (sum(p for _, p in bodies) for bodies in (now, before))
        if len(now) > len(before) or pixels > pixels_before:
            self.wrong.append(f"sealed: {len(now)} voids of {pixels} pixels, the raw stack has "
                              f"{len(before)} of {pixels_before}")
