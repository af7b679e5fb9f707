#!/usr/bin/python3
"""Reads every #include and fails on an arrow that the house does not allow.

    check_includes.py ROOT COMPILER

Also: every public header compiles alone, no tracked text names a path of one machine, and no source
file is longer than 600 lines (one idea a file). Prints what it looked at, so that a run that looks at
nothing is seen.
"""
import re
import subprocess
import sys
from pathlib import Path

# Which rooms a room may include; downward through several rooms is allowed.
DIRECT = {
    "fault": [], "findings": ["fault"], "mask": ["fault"], "physics": ["mask", "findings"],
    "posts": ["physics"], "check": ["posts"], "stack": ["mask"], "cards": ["check"],
    "report": ["check"], "calibrate": ["stack", "cards"],
    "passes": ["cards", "report", "stack", "calibrate"], "cli": [],
}
PUBLIC = {"passes", "cli"}  # the rooms that may include falsework/*.h
LONGEST = 600


def below(room, seen=None):
    seen = set() if seen is None else seen
    for next_room in DIRECT[room]:
        if next_room not in seen:
            seen.add(next_room)
            below(next_room, seen)
    return seen | {"fault"}


def check_arrows(root, wrong):
    arrows = 0
    for file in sorted((root / "src").rglob("*.[ch]")):
        room = file.relative_to(root / "src").parts[0]
        if room not in DIRECT:
            wrong.append(f"{file}: no room of the house")
            continue
        for number, line in enumerate(file.read_text().splitlines(), 1):
            found = re.match(r'\s*#\s*include\s*"([^"/]+)/', line)
            if not found:
                continue
            arrows += 1
            to = found.group(1)
            allowed = to == room or to in below(room) if room != "cli" else to == "cli"
            allowed = allowed or (to == "falsework" and room in PUBLIC)
            if not allowed:
                wrong.append(f"{file}:{number}: {room} may not include {to}")
    return arrows


def check_public(root, compiler, wrong):
    headers = sorted((root / "include/falsework").glob("*.h"))
    for header in headers:
        text = f'#include "falsework/{header.name}"\n'
        run = subprocess.run([compiler, "-std=c17", "-fsyntax-only", "-Wall", "-Wextra", "-Werror",
                              f"-I{root}/include", "-xc", "-"], input=text, text=True,
                             capture_output=True)
        if run.returncode:
            wrong.append(f"{header}: does not compile alone: {run.stderr.splitlines()[0]}")
        if "src/" in header.read_text():
            wrong.append(f"{header}: names an inner file")
    return len(headers)


def tracked(root):
    run = subprocess.run(["git", "-C", str(root), "ls-files", "--cached", "--others",
                          "--exclude-standard"], capture_output=True, text=True, check=True)
    return [root / name for name in run.stdout.splitlines() if (root / name).is_file()]


def check_texts(root, wrong):
    # spelled apart, so that this file does not name one itself
    private = re.compile(r"(^|[^A-Za-z0-9._-])/(ho" "me|ro" "ot|wo" "rk)/")
    files = 0
    for file in tracked(root):
        try:
            text = file.read_text()
        except UnicodeDecodeError:
            continue
        files += 1
        if private.search(text):
            wrong.append(f"{file}: names a path of one machine")
        if file.suffix in (".c", ".h") and "src" in file.parts and len(text.splitlines()) > LONGEST:
            wrong.append(f"{file}: {len(text.splitlines())} lines, split it")
    return files


def main():
    root, compiler = Path(sys.argv[1]), sys.argv[2]
    wrong = []
    arrows = check_arrows(root, wrong)
    headers = check_public(root, compiler, wrong)
    files = check_texts(root, wrong)
    print(f"looked at {arrows} includes, {headers} public headers, {files} texts")
    for line in wrong:
        print(line)
    return 1 if wrong or arrows < 100 or headers < 8 or files < 50 else 0


if __name__ == "__main__":
    sys.exit(main())
