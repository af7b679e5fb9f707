#!/usr/bin/python3
"""A flat 20 x 20 mm face parallel to the plate: tips against what cover and load ask for.

    flat_face.py FALSEWORK

Cover governs: with a load close to nothing, tips <= 1.3 A / (2.598 (reach + r_tip)^2). 3 sqrt(3) / 2 =
2.598 is the hexagon in the unit circle, the area each disc of the thinnest cover of the plane has for
itself (Kershner, Amer. J. Math. 61 (1939) 665).

Load governs: total tip area <= 1.3 load margin / strength; and each tip alone holds the film load of
the places nearest to it. The field of the square is the torsion series (Timoshenko and Goodier):
    u(x, y) = sum over odd n of 4 a^2 / (n pi)^3 (-1)^((n-1)/2) (1 - cosh(n pi y / a) / cosh(n pi / 2))
    cos(n pi x / a), |x|, |y| <= a / 2, and suction = q u with q = 12 eta v / h^3 (Reynolds 1886).
"""
import json
import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tools"))
from stack_io import write_mask  # noqa: E402

FALSEWORK = sys.argv[1]
SIDE, PIXEL, REACH_TIP = 20.0, 0.05, 0.15
TENSILE, MARGIN = 2.0, 2.0


def cards(folder, reach, viscosity, gap):
    (folder / "resin.yaml").write_text(f"""name: flat face (invented values)
viscosity_mPa_s: {viscosity}
cure: {{penetration_um: 110, critical_mJ_cm2: 9.0, exposure_mJ_cm2: 38}}
green: {{tensile_MPa: {TENSILE}, modulus_MPa: 250, plate_adhesion_MPa: 5}}
support: {{reach_mm: {reach}, angle_deg: 40}}
""")
    (folder / "machine.yaml").write_text(f"""name: flat face (invented values)
separation: {{mode: pull, speed_mm_s: 1.0, gap_um: {gap}}}
plate: {{size_mm: [30, 30]}}
""")
    (folder / "job.yaml").write_text(f"""stack: {{pixel_um: [50, 50], layer_um: 50}}
resin: resin.yaml
machine: machine.yaml
posts: {{lift_mm: 4, tip_mm: [0.30, 0.80], neck_mm: 1.5, shaft_mm: [0.8, 3.0], foot_mm: 3.0,
  lean_deg: 30, clearance_mm: 0.30, bite_mm: 0.10}}
gate: {{margin: {MARGIN}}}
""")


def prop(folder, reach, viscosity, gap):
    raw = folder / "raw"
    if not raw.exists():
        raw.mkdir()
        mask = np.zeros((480, 480), np.uint8)
        mask[40:440, 40:440] = 255
        for n in range(20):
            write_mask(raw / f"{n:03d}.png", mask)
    cards(folder, reach, viscosity, gap)
    done = subprocess.run([FALSEWORK, "prop", raw, "--job", folder / "job.yaml", "--out",
                           folder / "out", "--replace", "--json"] if (folder / "out").exists() else
                          [FALSEWORK, "prop", raw, "--job", folder / "job.yaml", "--out",
                           folder / "out", "--json"], stdout=subprocess.PIPE, text=True)
    if done.returncode:
        sys.exit(f"prop refused: {done.stdout[:2000]}")
    return json.loads(done.stdout)


def cover(folder):
    for reach in (1.5, 1.0, 0.6):
        report = prop(folder, reach, 1, 400)
        bound = SIDE * SIDE / (2.598 * (reach + REACH_TIP) ** 2)
        tips = report["totals"]["posts"]
        smallest = all(abs(p["tip_mm"] - 0.3) < 1e-9 for p in report["posts"])
        print(f"reach {reach}: {tips} tips, bound {bound:.1f}, ratio {tips / bound:.3f}")
        if tips > 1.3 * bound or not smallest:
            sys.exit(f"more than 1.3 times the cover bound, or a tip grew: {tips}")


def field(q):
    """Suction in MPa at the pixel centres of the square, by the series."""
    x = (np.arange(400) + 0.5) * PIXEL - SIDE / 2
    u = np.zeros((400, 400))
    for n in range(1, 200, 2):
        k = n * np.pi / SIDE
        shape = 1 - np.exp(k * (np.abs(x) - SIDE / 2)) * (1 + np.exp(-2 * k * np.abs(x))) / (
            1 + np.exp(-k * SIDE))
        u += (4 * SIDE ** 2 / (n * np.pi) ** 3 * (-1) ** ((n - 1) // 2)) * np.outer(
            shape, np.cos(k * x))
    return q * u


def load(folder):
    viscosity, gap = 250, 100  # below the cap, so that the series holds
    q = 12 * viscosity * 1e-9 * 1.0 / (gap * 1e-3) ** 3
    report = prop(folder, 1.5, viscosity, gap)
    suction = field(q)
    total = suction.sum() * PIXEL ** 2
    exact = q * 0.1405770150 / 4 * SIDE ** 4  # the handbook's torsion constant of the square
    peel = report["layers"][report["raw"]["lift_layers"]]["peel_N"]
    print(f"load: series {total:.4f} N, handbook {exact:.4f} N, report {peel:.4f} N")
    if abs(total / exact - 1) > 1e-3 or abs(peel / exact - 1) > 0.01:
        sys.exit("the peel load is off")
    tips = np.array([p["path_mm"][0][:2] for p in report["posts"]])
    xs = (np.arange(40, 440) + 0.5) * PIXEL
    px, py = np.meshgrid(xs, xs)
    nearest = np.argmin([np.hypot(px - x, py - y) - p["tip_mm"] / 2
                         for (x, y), p in zip(tips, report["posts"])], axis=0)
    share = np.bincount(nearest.ravel(), suction.ravel() * PIXEL ** 2, len(tips))
    # Each tip is sized to the larger of two shares: that of the places nearest to it, and that of a
    # rigid face on equal tips, 1 / n of all. So the tips together hold more than the load itself.
    least = np.maximum(share, total / len(tips)).sum() * MARGIN / TENSILE
    area = report["totals"]["tip_area_mm2"]
    print(f"tip area {area:.3f} mm2, the larger shares need {least:.3f}, ratio {area / least:.3f}; "
          f"{area / (total * MARGIN / TENSILE):.3f} of what the load alone needs, {len(tips)} tips")
    if area > 1.3 * least:
        sys.exit("more tip area than 1.3 times what the shares need")
    if "-v" in sys.argv:
        for p, s in sorted(zip(report["posts"], share), key=lambda t: t[0]["load_N"] / t[1]):
            print(p["id"], p["path_mm"][0], p["tip_mm"], p["load_N"], round(s, 4), p["load_layer"], p["contact_mm2"])
    worst = min(p["contact_mm2"] * TENSILE / s for p, s in zip(report["posts"], share))
    print(f"each tip by an independent sum: smallest margin {worst:.3f} (asked {MARGIN}, 15 % for the "
          f"0.2 mm cells and 8 directions in which loads are shared)")
    if worst < MARGIN * 0.85:
        sys.exit("a tip does not hold the load of the places nearest to it")


with tempfile.TemporaryDirectory() as name:
    cover(Path(name))
    load(Path(name))
