"""What the sheet prints is a formula of the language again: the Lagrangian as printed gives the same equations.

    reprint.py PROGRAM [--only MODEL]

For every example and every model of models/ (and the worked cases, see verdicts.py): its declarations, forces and claims stay,
its energies are replaced by one `lagrangian` with the sheet's own `text`, then `plain`; each charge is claimed as it is printed.
"""
import argparse
import os
import shutil
import sys
import tempfile

import plain
import program
import sheets
from verdicts import TERMS, head, items, models

CLAIMS = ("conserved", "symmetry", "broken symmetry")


def rewritten(lines, sheet, spelling):
    """The model with its printed Lagrangian and printed charges."""
    out = [x for x in lines if head(x)[0] not in TERMS + CLAIMS]
    out.append("lagrangian whole_again = " + sheet["lagrangian"][spelling])
    for k, s in enumerate(sheet["symmetries"]):
        if s.get("charge"):
            out.append(f"conserved charge_{k} = " + s["charge"][spelling])
    return "\n".join(out) + "\n"


def check(prog, path):
    name = os.path.basename(path)[:-6]
    report = sheets.Report(name)
    with open(path, encoding="utf-8") as f:
        lines = items(f.read())
    try:
        first = prog.sheet(path)
        for spelling in ("text", "plain"):
            text = rewritten(lines, first, spelling)
            if "where" in text:
                report.notes.append(f"{name} is printed with abbreviations")
                continue
            with tempfile.TemporaryDirectory() as folder:
                for shared in os.listdir(os.path.dirname(path)):
                    if shared.endswith(".least"):
                        shutil.copy(os.path.join(os.path.dirname(path), shared), folder)
                with open(os.path.join(folder, "model.least"), "w", encoding="utf-8") as f:
                    f.write(text)
                again = prog.sheet(os.path.join(folder, "model.least"))
            same(report, spelling, first, again)
            if report.failed:
                report.lines += ["    " + line for line in text.splitlines()]
    except program.NoSheet as x:
        report.check(False, "sheet", x)
    except (KeyError, TypeError, AttributeError, plain.Unreadable, ArithmeticError) as x:
        report.check(False, "the sheet's form", f"{type(x).__name__} {x}")
    return report


def same(report, spelling, first, again):
    new = [e for e in program.errors(again) if e not in program.errors(first)]
    if not report.check(not new, f"{spelling} is read again", new[:2]):
        return
    points = [sheets.Point(f"{report.name}/{k}", {"h": (2, 3)}) for k in range(2)]
    rows = program.by_name(again["coordinates"])
    for c in first["coordinates"]:
        for field in ("momentum", "force", "equation"):
            want = [sheets.Formula.of(c[field])(p) for p in points]
            report.same(f"{field} of {c['name']} from its {spelling}", rows[c["name"]][field], want, points)
    held = program.by_name(again["conserved"])
    for k, s in enumerate(first["symmetries"]):
        if s.get("charge") and "undecided" not in s:
            wanted = s["rate"]["plain"] == "0"
            got = held.get(f"charge_{k}", {}).get("holds")
            report.check(got == wanted, f"charge of {s['name']} from its {spelling}", f"holds is {got}, should be {wanted}")


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only")
    o = ap.parse_args(arguments)
    prog = program.Program(o.program)
    reports = [check(prog, p) for p in models(o.only)]
    for r in reports:
        for line in r.lines + [f"note: {n}" for n in r.notes[:1]]:
            print(line)
    passed, failed = sum(r.passed for r in reports), sum(r.failed for r in reports)
    print(f"{len(reports)} models printed and read: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
