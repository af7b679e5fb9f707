"""The other side of test_png_write.c: writes and checks pictures with python3-png.

png_peer.py present - 0 0            exit 0 when python3-png is there
png_peer.py write FILE TYPE DEPTH    writes the test picture (colour type as in IHDR)
png_peer.py check FILE TYPE DEPTH    exit 0 when FILE holds that picture, in that form
"""

import sys

try:
    import png
except ImportError:
    sys.exit(77)

WIDTH, HEIGHT = 37, 11


def value(x, y, values):
    return (x // 5 + 3 * y + (y if x % 7 == 0 else 0)) % values


def palette(depth):
    values = 1 << depth
    return [(255 - i * 255 // (values - 1),) * 3 for i in range(values)]


def rows(kind, depth):
    channels = 3 if kind == 2 else 1
    return [
        [value(x, y, 1 << depth) for x in range(WIDTH) for _ in range(channels)]
        for y in range(HEIGHT)
    ]


def write(path, kind, depth):
    form = {"greyscale": kind == 0, "bitdepth": depth}
    if kind == 3:
        form["palette"] = palette(depth)
    with open(path, "wb") as out:
        png.Writer(WIDTH, HEIGHT, **form).write(out, rows(kind, depth))


def check(path, kind, depth):
    width, height, got, info = png.Reader(filename=path).read()
    same = [list(row) for row in got] == rows(kind, depth)
    if kind == 3:
        same = same and [tuple(p) for p in info["palette"]] == palette(depth)
    same = same and (width, height) == (WIDTH, HEIGHT) and info["bitdepth"] == depth
    return same and info["greyscale"] == (kind == 0)


if __name__ == "__main__":
    action, file, colour_type, bits = sys.argv[1], sys.argv[2], int(sys.argv[3]), int(sys.argv[4])
    if action == "write":
        write(file, colour_type, bits)
    elif action == "check":
        sys.exit(0 if check(file, colour_type, bits) else 1)
