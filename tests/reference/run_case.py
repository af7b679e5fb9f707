#!/usr/bin/python3
"""One whole case, judged by other means at every step.

    run_case.py CASE FALSEWORK PART DENSE_DEBT JOB

CASE: manifold       the demo part, first solid in layer 0, lifted by the job
      bunny-plate    the open mesh `bunny` (npm, public domain), first solid in layer 0
      bunny-lifted   the same with the lift in its masks already
survey -> check_survey.py (scipy labels, layer by layer, exact); prop must pass the gate ->
check_prop.py (scipy and a dense Dijkstra on the written files); recheck must pass and say the same.
"""
import json
import math
import subprocess
import sys
import tempfile
from pathlib import Path

HERE = Path(__file__).resolve().parent
TOOLS = HERE.parent / "tools"
PYTHON = "/usr/bin/python3"

# The job that the cases share: models/jobs/manifold.yaml and the cards that it names. The grey from
# which a pixel cures there, by the working curve (Jacobs 1992): g / 255 >= Ec / (E0 exp(-t / Dp)).
SOLID_LEVEL = {50: math.ceil(255 * 9.0 / (38 * math.exp(-50 / 110)))}
RULES = ["--reach-mm", "1.5", "--angle-deg", "40", "--clearance-mm", "0.3", "--tip-mm", "0.3"]
SIZE = ["--pixel-um", "50", "50", "--layer-um", "50"]


def run(*command, status=0):
    print("+", *(Path(str(c)).name for c in command), flush=True)
    done = subprocess.run([str(c) for c in command], stdout=subprocess.PIPE, text=True)
    if done.returncode != status:
        sys.exit(f"{done.stdout}\nstatus {done.returncode}, expected {status}")
    return done.stdout


def make_raw(case, part, folder):
    raw = folder / "raw"
    if case == "manifold":
        run(part, "manifold", raw)
        return raw
    mesh = run("sh", TOOLS / "fetch_bunny.sh", folder / "npm").strip().splitlines()[-1]
    lift = ["--lift", "100"] if case == "bunny-lifted" else []
    run(PYTHON, TOOLS / "slice_mesh.py", mesh, raw, "--height", "18", "--size-px", "560", "560", *lift)
    return raw


def same(report, again):
    """What recheck says of the files against what prop wrote."""
    for key in ("verdict", "findings", "layers", "parts", "posts", "totals", "stack"):
        if report[key] != again[key]:
            sys.exit(f"recheck differs from prop's report in {key}")


def main():
    case, falsework, part, dense_debt, job = sys.argv[1:]
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        raw, out = make_raw(case, part, folder), folder / "out"
        (folder / "survey.json").write_text(run(falsework, "survey", raw, "--job", job, "--json"))
        print(run(PYTHON, HERE / "check_survey.py", raw, folder / "survey.json", "--pixel-um", "50",
                  "50", "--solid-level", SOLID_LEVEL[50]))
        report = json.loads(run(falsework, "prop", raw, "--job", job, "--out", out, "--json"))
        totals = report["totals"]
        print(f"{case}: {totals['posts']} posts, peak {totals['peak_peel_N']} N in layer "
              f"{totals['peak_layer']}, tips {totals['tip_area_mm2']} mm2")
        print(run(PYTHON, HERE / "check_prop.py", raw, out, "--dense-debt", dense_debt, *SIZE, *RULES))
        again = json.loads(run(falsework, "recheck", out / "layers", "--job", job, "--posts",
                               out / "posts.json", "--raw", raw, "--json"))
        same(report, again)
        print("recheck says the same as prop")


if __name__ == "__main__":
    main()
