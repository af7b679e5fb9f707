"""Random and built volumes through dump_bodies, compared with scipy.ndimage.label of the volume.

Usage: compare_scipy.py DUMP_BODIES. Exit 0 when every line of every volume is equal, 1 when one is
not, 77 (skipped) without numpy and scipy. For every layer n the volume of layers 0..n is labelled
afresh, which is the definition and shares nothing with the streaming code under test:
  solid: joined through the four pixel edges in the layer and through pixel faces along z;
  void:  joined through edges and corners in the layer and through faces along z, in a volume with a
         border of vat around each layer; nothing lies before layer 0 (the plate closes it).
"""
import subprocess
import sys

try:
    import numpy as np
    from scipy import ndimage
except ImportError as missing:
    print(f"skipped: {missing}")
    sys.exit(77)

FACES = ndimage.generate_binary_structure(3, 1)
VOID = FACES.copy()
VOID[1] = True
CROSS = ndimage.generate_binary_structure(2, 1)


def pixels_in(labels, wanted):
    """Voxels of `labels` that bear one of the labels `wanted`."""
    return int(np.isin(labels, wanted).sum())


def solid_lines(intended, n):
    """(regions, onset, adrift in layer n, adrift in 0..n) by the definitions."""
    regions, count = ndimage.label(intended[n], CROSS)
    below = intended[n - 1] if n > 0 else np.ones_like(intended[n])
    held = np.unique(regions[below & intended[n]])
    onset = pixels_in(regions, np.setdiff1d(np.arange(1, count + 1), held))
    labels, count = ndimage.label(intended[:n + 1], FACES)
    adrift = np.setdiff1d(np.arange(1, count + 1), np.unique(labels[0]))
    return regions.max(), onset, pixels_in(labels[n], adrift), pixels_in(labels, adrift)


def label_void(void):
    """Labels of the void with its border of vat, and the label of the vat."""
    padded = np.pad(void, ((0, 0), (1, 1), (1, 1)), constant_values=True)
    labels, count = ndimage.label(padded, VOID)
    return labels, count, labels[0, 0, 0]


def sealed_lines(void, n):
    """Void pixels cut off from the vat while layer n is peeled: (in layer n, in layers 0..n)."""
    labels, count, vat = label_void(void[:n + 1])
    sealed = np.setdiff1d(np.arange(1, count + 1), [vat])
    return pixels_in(labels[n], sealed), pixels_in(labels, sealed)


def body_rows(labels, skip=0):
    """{label: (layer, y, x, pixels)} with the first voxel in the order (layer, y, x)."""
    flat = labels.ravel()
    found, first, pixels = np.unique(flat, return_index=True, return_counts=True)
    where = np.unravel_index(first, labels.shape)
    return {int(label): (int(z), int(y), int(x), int(number))
            for label, z, y, x, number in zip(found, *where, pixels)
            if label not in (0, skip)}


def solid_bodies(intended):
    labels, _ = ndimage.label(intended, FACES)
    grounded = set(np.unique(labels[0]).tolist())
    return sorted((*row, int(label in grounded)) for label, row in body_rows(labels).items())


def closed_voids(void):
    """Bodies of void that are not open to the vat; last: closed toward the window as well."""
    labels, _, vat = label_void(void)
    last = set(np.unique(labels[-1]).tolist())
    labels = labels[:, 1:-1, 1:-1]
    return sorted((*row, 0, int(label not in last))
                  for label, row in body_rows(labels, skip=vat).items())


def expected(volume, intended_least, solid_least):
    intended, void = volume >= intended_least, volume < solid_least
    layers = [tuple(map(int, (n, *solid_lines(intended, n), *sealed_lines(void, n))))
              for n in range(len(volume))]
    return layers, solid_bodies(intended), closed_voids(void)


def dumped(program, volume, intended_least, solid_least):
    head = np.array([*volume.shape, intended_least, solid_least], dtype=np.int32)
    text = subprocess.run([program], input=head.tobytes() + volume.tobytes(), check=True,
                          capture_output=True).stdout.decode()
    layers, solid, void = [], [], []
    for line in text.splitlines():
        kind, *words = line.split()
        row = tuple(int(word) for word in words if word.lstrip("-").isdigit())
        {"layer": layers, "solid": solid, "void": void}[kind].append(row)
    return layers, solid, [row for row in void if row[4] == 0]


def random_volumes(source):
    """Pixels by themselves at several densities, and blobs of several sizes."""
    for shape in ((1, 1, 1), (4, 1, 9), (5, 7, 1), (9, 13, 17), (16, 24, 31), (30, 20, 20)):
        for density in (0.05, 0.2, 0.31, 0.41, 0.5, 0.6, 0.7, 0.8, 0.95):
            yield f"random {shape} {density}", (source.random(shape) < density) * np.uint8(255)
    for shape in ((20, 40, 50), (24, 48, 40)):
        for sigma in (0.8, 1.5, (3, 1, 1), (0.5, 3, 3)):
            field = ndimage.gaussian_filter(source.standard_normal(shape), sigma)
            field = (field - field.min()) / np.ptp(field)
            yield f"blobs {shape} {sigma}", (field * 255).astype(np.uint8)
            shell = (255 - np.abs(field - 0.5) * 700).clip(0, 255)
            yield f"shells {shape} {sigma}", shell.astype(np.uint8)


def block(shape, *boxes, dark=()):
    """Lit boxes, then dark ones: each (z0, z1, y0, y1, x0, x1)."""
    volume = np.zeros(shape, dtype=np.uint8)
    for value, group in ((255, boxes), (0, dark)):
        for z0, z1, y0, y1, x0, x1 in group:
            volume[z0:z1, y0:y1, x0:x1] = value
    return volume


def helix(shape, turns, radius, thick):
    z, y, x = np.indices(shape)
    angle = 2 * np.pi * turns * z / shape[0]
    along_y = shape[1] / 2 + radius * np.sin(angle)
    along_x = shape[2] / 2 + radius * np.cos(angle)
    return ((np.hypot(y - along_y, x - along_x) < thick) * 255).astype(np.uint8)


def cups():
    """(name, volume, void pixels by hand: enclosed, and at the end open to the window alone)."""
    wall = (0, 12, 2, 12, 2, 12)
    wells = {
        "cup on the plate, open to the window": ([(4, 12, 4, 10, 4, 10)], (0, 8 * 36)),
        "cup closed at the window side": ([(4, 10, 4, 10, 4, 10)], (6 * 36, 0)),
        "cup upside down on the plate": ([(0, 10, 4, 10, 4, 10)], (10 * 36, 0)),
        "cup with a hole in its side": ([(4, 12, 4, 10, 4, 10), (6, 7, 6, 7, 9, 12)], (0, 0)),
        "void out through a corner": ([(4, 6, 4, 11, 4, 11), (4, 6, 11, 12, 11, 12)], (0, 0)),
        "edge shared along z": ([(4, 6, 4, 10, 4, 10), (6, 8, 10, 11, 10, 11)], (74, 0)),
    }
    for name, (dark, counted) in wells.items():
        yield name, block((12, 14, 16), wall, dark=dark), counted
    raised = block((12, 14, 16), (2, 12, 2, 12, 2, 12), dark=[(2, 12, 4, 10, 4, 10)])
    yield "tube open to the plate side", raised, (0, 0)


def shapes():
    """As cups(); here only the helix of void is sealed."""
    piers = ((0, 8, 4, 8, 1, 3), (0, 8, 4, 8, 12, 14), (8, 10, 4, 8, 1, 14))
    late = ((0, 3, 1, 3, 1, 3), (4, 9, 4, 8, 1, 3), (5, 9, 4, 8, 12, 14), (9, 11, 4, 8, 1, 14))
    boxes = {
        "bridge on two piers": piers,
        "islands that join late": late,
        "gap of one layer": ((0, 4, 3, 9, 3, 9), (5, 12, 3, 9, 3, 9)),
        "nothing": (),
        "everything": ((0, 12, 0, 14, 0, 16),),
    }
    for name, lit in boxes.items():
        yield name, block((12, 14, 16), *lit), (0, 0)
    spring = helix((40, 24, 24), 3, 7, 2.5)
    yield "helix", spring, (0, 0)
    yield "helix of void, out at the window", 255 - spring, (0, int((spring > 0).sum()))


def compare(program, name, volume, least):
    """Compares one volume; returns what it held of each kind and its void pixels as in shapes()."""
    want, got = expected(volume, *least), dumped(program, volume, *least)
    for kind, ours, theirs in zip(("layers", "solid bodies", "closed voids"), got, want):
        for one, other in zip(ours, theirs):
            if one != other:
                sys.exit(f"{name} {least}: {kind}: program {one}, scipy {other}")
        if len(ours) != len(theirs):
            sys.exit(f"{name} {least}: {kind}: program {len(ours)}, scipy {len(theirs)}")
    layers, solid, voids = want
    enclosed = sum(row[3] for row in voids if row[5])
    held = np.sum([row[2:] for row in layers], axis=0)
    to_window = layers[-1][6] - enclosed
    return np.array([len(volume), *held, len(solid), enclosed]), (enclosed, to_window)


def main(program):
    source = np.random.default_rng(20)
    held = np.zeros(8, dtype=np.int64)
    volumes = 0
    for name, volume in random_volumes(source):
        for least in ((128, 128), (110, 150), (128, 2**31 - 1)):
            held += compare(program, name, volume, least)[0]
            volumes += 1
    for name, volume, counted in (*cups(), *shapes()):
        found, void_pixels = compare(program, name, volume, (128, 128))
        if void_pixels != counted:
            sys.exit(f"{name}: void pixels {void_pixels}, counted by hand {counted}")
        held += found
        volumes += 1
    words = ("layers", "onset", "adrift here", "adrift in all", "sealed here", "sealed in all",
             "solid bodies", "enclosed")
    print(f"{volumes} volumes equal:",
          ", ".join(f"{word} {count}" for word, count in zip(words, held)))
    return 0 if held.min() > 0 else "a kind of pixel never came up: the comparison is idle"


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
