"""The circles of a post, written down anew from the definition in the post file's own terms.

A horizontal section of a post at height z is a full circle. z_face is the plate-facing side of layer
tip_layer. From z_face to z_face + bite the diameter is tip_mm; over neck_mm toward the plate it widens
linearly to shaft_mm; then it is shaft_mm; on the plate it flares at 45 degrees to foot_mm, over a
height of (foot_mm - shaft_mm) / 2. Where zones overlap the larger diameter wins. The centre lies on
path_mm (tip first), and keeps the tip's place in the bite. Sections are taken at mid layer.
"""
import numpy as np


class Shape:
    def __init__(self, post, layer_mm):
        self.id, self.layer_mm = post["id"], layer_mm
        self.tip, self.neck, self.shaft, self.foot = (
            post[key] for key in ("tip_mm", "neck_mm", "shaft_mm", "foot_mm"))
        self.tip_layer = post["tip_layer"]
        self.end = post["tip_layer"] + post["bite_layers"] if post["routed"] else 0
        self.face = post["tip_layer"] * layer_mm
        path = np.array(post["path_mm"], float).reshape(-1, 3)[::-1]
        self.z, self.x, self.y = path[:, 2], path[:, 0], path[:, 1]

    def height(self, layer):
        return (layer + 0.5) * self.layer_mm

    def centre(self, layer):
        z = self.height(layer)
        return np.interp(z, self.z, self.x), np.interp(z, self.z, self.y)

    def radius(self, layer):
        z = self.height(layer)
        below = self.face - z
        if below <= 0:
            return self.tip / 2
        stem = self.shaft if below >= self.neck else (
            self.tip + (self.shaft - self.tip) * below / self.neck)
        return max(stem, self.foot - 2 * z) / 2

    def in_layer(self, layer):
        return 0 <= layer < self.end

    def is_free_standing(self, layer):
        """Shaft or foot: further than the neck's length from the face."""
        return self.in_layer(layer) and self.face - self.height(layer) > self.neck


def paint(mask, centre, radius, pixel, value=True):
    """Sets the pixels of mask whose centres lie within the circle; all lengths in mm."""
    (x, y), (px, py) = centre, pixel
    x0, x1 = max(int((x - radius) / px) - 1, 0), min(int((x + radius) / px) + 2, mask.shape[1])
    y0, y1 = max(int((y - radius) / py) - 1, 0), min(int((y + radius) / py) + 2, mask.shape[0])
    if x0 >= x1 or y0 >= y1:
        return
    dx = (np.arange(x0, x1) + 0.5) * px - x
    dy = (np.arange(y0, y1) + 0.5) * py - y
    mask[y0:y1, x0:x1][dx[None, :] ** 2 + dy[:, None] ** 2 <= radius ** 2] = value
