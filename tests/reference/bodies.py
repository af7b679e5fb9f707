"""Bodies and voids of a growing stack, by definition: scipy's labels of each layer, joined across
layers by shared pixels with a union-find, so that at layer n only layers 0..n exist."""
import numpy as np
from scipy import ndimage

FOUR = ndimage.generate_binary_structure(2, 1)
EIGHT = ndimage.generate_binary_structure(2, 2)


class Forest:
    """Union-find over regions; each root carries a pixel count and one flag that spreads."""

    def __init__(self):
        self.parent, self.pixels, self.flag, self.last = [], [], [], []

    def add(self, pixels, flag, layer):
        self.parent.append(len(self.parent))
        self.pixels.append(int(pixels))
        self.flag.append(bool(flag))
        self.last.append(layer)
        return len(self.parent) - 1

    def root(self, node):
        while self.parent[node] != node:
            self.parent[node] = self.parent[self.parent[node]]
            node = self.parent[node]
        return node

    def join(self, a, b):
        a, b = sorted((self.root(a), self.root(b)))
        if a != b:
            self.parent[b] = a
            self.pixels[a] += self.pixels[b]
            self.flag[a] = self.flag[a] or self.flag[b]
            self.last[a] = max(self.last[a], self.last[b])


class Growth:
    """Feeds layers one by one. After each `grow`, `labels` [height][width] are this layer's regions
    1..count, `node` [count + 1] their places in the forest and `overlaps` [count + 1] the pixels that
    each shares with the layer before."""

    def __init__(self, structure):
        self.structure, self.forest, self.layer = structure, Forest(), -1
        self.labels = self.node = self.overlaps = None

    def grow(self, mask, flagged):
        """mask: the pixels; flagged(labels, count): labels that carry the flag by themselves."""
        self.layer += 1
        labels, count = ndimage.label(mask, self.structure)
        sizes = np.bincount(labels.ravel(), minlength=count + 1)
        flags = flagged(labels, count)
        node = [-1] + [self.forest.add(sizes[i], i in flags, self.layer)
                       for i in range(1, count + 1)]
        overlaps = np.zeros(count + 1, np.int64)
        if self.labels is not None:
            both = (labels > 0) & (self.labels > 0)
            codes, shared = np.unique(
                self.labels[both].astype(np.int64) * (count + 1) + labels[both], return_counts=True)
            for code, pixels in zip(codes, shared):
                old, new = divmod(int(code), count + 1)
                self.forest.join(self.node[old], node[new])
                overlaps[new] += pixels
        self.labels, self.node, self.overlaps, self.sizes = labels, node, overlaps, sizes

    def unflagged(self):
        """Labels of this layer whose body does not carry the flag yet."""
        return [i for i in range(1, len(self.node))
                if not self.forest.flag[self.forest.root(self.node[i])]]


class Solid(Growth):
    """4-connected regions; the flag is `held`: everything in layer 0 is on the plate."""

    def __init__(self):
        super().__init__(FOUR)

    def add(self, mask):
        self.grow(mask, lambda labels, count: range(1, count + 1) if self.layer == 0 else ())

    def regions(self):
        return len(self.node) - 1

    def onsets(self):
        return [] if self.layer == 0 else [i for i in range(1, len(self.node))
                                           if self.overlaps[i] == 0]

    def onset_px(self):
        return int(sum(self.sizes[i] for i in self.onsets()))

    def adrift_px(self):
        return int(sum(self.sizes[i] for i in self.unflagged()))


class Void(Growth):
    """8-connected regions of the complement; the flag is `vat`: what reaches the image's surroundings.
    The plate closes layer 0; the window closes the newest layer."""

    def __init__(self):
        super().__init__(EIGHT)

    def add(self, mask):
        around = np.pad(~mask, 1, constant_values=True)
        self.grow(around, lambda labels, count: {int(labels[0, 0])})

    def blind_px(self):
        return int(sum(self.sizes[i] for i in self.unflagged()))

    def enclosed(self):
        """Pixel counts of the void bodies that are closed on all sides when the print has ended: no
        vat, and not open at the last layer either. [(first node, pixels)]"""
        forest = self.forest
        return [(n, forest.pixels[n]) for n in range(len(forest.parent))
                if forest.parent[n] == n and not forest.flag[n] and forest.last[n] < self.layer]
