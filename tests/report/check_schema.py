#!/usr/bin/python3
"""Validates what the writers write against the JSON Schemas, and shows that the schemas bite.

usage: check_schema.py WRITE_EXAMPLES SCHEMA_FOLDER
WRITE_EXAMPLES is the program of tests/report/write_examples.c. Exit 77: no python3-jsonschema.
"""
import copy
import json
import pathlib
import subprocess
import sys
import tempfile

try:
    import jsonschema
except ImportError:
    print("python3-jsonschema is not installed")
    sys.exit(77)


def load_validators(folder):
    schema = {
        name: json.loads((folder / f"{name}.schema.json").read_text(encoding="utf-8"))
        for name in ("report", "posts")
    }
    store = {one["$id"]: one for one in schema.values()}
    validator = {}
    for name, one in schema.items():
        jsonschema.Draft202012Validator.check_schema(one)
        resolver = jsonschema.RefResolver(one["$id"], one, store=store)
        validator[name] = jsonschema.Draft202012Validator(one, resolver=resolver)
    return validator


def containers(value, path=()):
    """Every object within value, with the path to it."""
    if isinstance(value, dict):
        yield path
        for key, item in value.items():
            yield from containers(item, path + (key,))
    elif isinstance(value, list):
        for index, item in enumerate(value):
            yield from containers(item, path + (index,))


def at(value, path):
    for step in path:
        value = value[step]
    return value


def broken(example):
    """Copies of example, each with one thing wrong: a key more, a key less, a value of no type."""
    for path in containers(example):
        more = copy.deepcopy(example)
        at(more, path)["stranger"] = 1
        yield f"{path} with a stranger", more
        for key in at(example, path):
            less = copy.deepcopy(example)
            del at(less, path)[key]
            yield f"{path} without {key}", less
            wrong = copy.deepcopy(example)
            at(wrong, path)[key] = {"no": "value"}
            yield f"{path} with a wrong {key}", wrong


def check(validator, name, example):
    for error in validator.iter_errors(example):
        sys.exit(f"{name}: {error.json_path}: {error.message}")
    count = 0
    for what, damaged in broken(example):
        if validator.is_valid(damaged):
            sys.exit(f"{name}: the schema lets pass: {what}")
        count += 1
    print(f"{name}: valid; {count} damaged copies refused")


def check_kinds(validator, example):
    """The example holds one finding of each kind: the schema lists these and no other."""
    listed = validator.schema["$defs"]["finding"]["properties"]["kind"]["enum"]
    written = [finding["kind"] for finding in example["findings"]]
    if listed != written:
        sys.exit(f"the schema's kinds {listed} are not those of the program {written}")


def main():
    program, folder = sys.argv[1], pathlib.Path(sys.argv[2])
    validator = load_validators(folder)
    with tempfile.TemporaryDirectory() as scratch:
        subprocess.run([program, scratch], check=True)
        for path in sorted(pathlib.Path(scratch).iterdir()):
            example = json.loads(path.read_text(encoding="utf-8"))
            kind = path.name.split("-")[0]
            check(validator[kind], path.name, example)
            if path.name == "report-full.json":
                check_kinds(validator[kind], example)


main()
