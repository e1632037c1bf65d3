"""Checks `leastwise check --as sarif` against the published schema of SARIF 2.1.0.

    validate.py PROGRAM

The logs are of the example models, of models with slips, of files that cannot be read, and of odd file names. A log with a
wrong field must fail, so that the check itself is known to work. Needs jsonschema. Ends with `N passed, N failed`.
"""
import copy
import json
import os
import pathlib
import subprocess
import sys
import tempfile

import jsonschema

HERE = pathlib.Path(__file__).parent
EXAMPLES = HERE.parent.parent / "grammar" / "examples"
SLIPS = "coordinate θ\nkinetic bob = 1/2 𝑚 θ'^2 +\npotential = = \nparameter l l\n"
BYTES = b"coordinate x\nkinetic T = 1/2 \xff x'^2\n"


def logs(program, folder):
    """(what, log) for each run."""
    files = {"slips.least": SLIPS.encode(), "a b#c%θ.least": SLIPS.encode(), "bytes.least": BYTES, "crlf.least": SLIPS.replace("\n", "\r\n").encode()}
    for name, data in files.items():
        (folder / name).write_bytes(data)
    runs = [[str(p)] for p in sorted(EXAMPLES.glob("*.least"))] + [[name] for name in files]
    runs += [["missing.least"], ["."], ["-"], list(files) + ["missing.least"]]
    for arguments in runs:
        command = [program, "check", "--as", "sarif", *arguments]
        done = subprocess.run(command, cwd=folder, input=SLIPS.encode(), capture_output=True, timeout=60)
        yield " ".join(arguments), json.loads(done.stdout.decode("utf-8"))


def main(program):
    with open(HERE / "sarif-schema-2.1.0.json", encoding="utf-8") as f:
        schema = json.load(f)
    kind = jsonschema.validators.validator_for(schema)
    kind.check_schema(schema)
    checker = kind(schema, format_checker=kind.FORMAT_CHECKER)
    passed, failed, last = 0, 0, None

    def check(good, what):
        nonlocal passed, failed
        passed, failed = passed + bool(good), failed + (not good)
        if not good:
            print("FAIL", what)

    with tempfile.TemporaryDirectory() as folder:
        for what, log in logs(program, pathlib.Path(folder)):
            errors = [f"{list(e.path)}: {e.message[:200]}" for e in checker.iter_errors(log)]
            check(not errors, f"{what}: {errors[:3]}")
            run = log["runs"][0]
            rules = run["tool"]["driver"]["rules"]
            good = all(rules[r["ruleIndex"]]["id"] == r["ruleId"] for r in run["results"])
            check(good, f"{what}: the rule index of each result")
            uris = [a["location"]["uri"] for a in run["artifacts"]]
            check(all(ord(c) < 128 and c not in " <>" for u in uris for c in u), f"{what}: URIs {uris}")
            last = log if run["results"] else last
    check(last is not None, "some log has results")
    for spoil in (lambda run: run.pop("tool"), lambda run: run.update(columnKind="bytes"), lambda run: run["results"][0].update(level="hint"),
                  lambda run: run["results"][0].pop("message"), lambda run: run.update(surprise=1)):
        wrong = copy.deepcopy(last)
        spoil(wrong["runs"][0])
        check(not checker.is_valid(wrong), "a wrong log is refused")
    print(f"{passed} passed, {failed} failed")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main(os.path.abspath(sys.argv[1])))
