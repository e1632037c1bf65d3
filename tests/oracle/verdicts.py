"""Verdicts must not depend on how a model is written: names, order of items and summands, splitting of terms.

    verdicts.py PROGRAM [--only MODEL] [--seeds 2]

Every example, every model of models/ and, where the folder of worked cases is at hand (LEASTWISE_CASES), every case is rewritten and
its sheet compared: statuses, blamed terms, `cyclic`, `momentum_conserved`, `energy`, `holds`, and for new names the findings' codes.
"""
import argparse
import collections
import multiprocessing
import os
import random
import re
import shutil
import sys
import tempfile
import unicodedata

import program
import sheets

HERE = os.path.dirname(os.path.abspath(__file__))
FOLDERS = [os.path.join(HERE, "..", "..", "grammar", "examples"), os.path.join(HERE, "models")]
WORD = re.compile(r"[^\W\d](?:(?![⁰¹²³⁴⁵⁶⁷⁸⁹])\w)*")      # a superscript is a power, not part of the name
TERMS = ("kinetic", "potential", "lagrangian")
RESERVED = {"sin", "cos", "tan", "asin", "acos", "atan", "atan2", "sinh", "cosh", "tanh", "exp", "log", "sqrt", "abs", "sign", "min", "max", "norm", "dot",
            "cross", "sum", "in", "on", "diag", "transpose", "turn", "spin", "momentum", "energy", "t", "pi", "π", "ε", "eps", "ex", "ey", "ez", "ħ"}
FOLD = str.maketrans("µϕϵϑ", "μφεθ")
NEW = ["u_{}", "w{}", "Φ_{}", "ζ{}", "v_{}b", "Q{}", "η_{}", "a{}", "Z_{}", "χ{}"]


def items(text):
    """The items without comments, dots written as primes, runs left out."""
    text = unicodedata.normalize("NFC", text).translate(FOLD)
    text = "\n".join(line.split("#")[0].rstrip() for line in text.splitlines())
    return [primes(x.strip()) for x in re.split(r"\n(?=\S)", text) if x.strip() and not x.startswith("run ")]


def primes(text):
    """ẋ₁ becomes x₁'."""
    text = unicodedata.normalize("NFD", text)
    text = re.sub(r"([^\W\d_])(\u0307+|\u0308)([\d₀₁₂₃₄₅₆₇₈₉]*(?:_\w+)?)",
                  lambda m: m[1] + m[3] + "'" * (2 if m[2] == "\u0308" else len(m[2])), text)
    return unicodedata.normalize("NFC", text)


def head(item):
    """(`cyclic coordinate`, the rest)."""
    m = re.match(r"((?:cyclic |broken )?\s*\w+)\s*(.*)", item, re.S)
    return " ".join(m[1].split()), m[2]


def commas(text):
    out, depth = [""], 0
    for c in text:
        depth += (c in "([") - (c in ")]")
        if c == "," and not depth:
            out.append("")
        else:
            out[-1] += c
    return out


def declared(item):
    """The names that an item introduces."""
    word, rest = head(item)
    if word in ("coordinate", "cyclic coordinate", "input", "parameter"):
        return [m[0] for one in commas(rest) if (m := WORD.match(one.strip()))]
    if word in ("let", "function", "index", "symmetry", "broken symmetry", "conserved", "constraint") or word in TERMS + ("dissipation", "force"):
        m = WORD.match(rest)
        return [m[0]] if m and re.match(r"\w+\s*(\[\w+\])?(\([^)]*\))?\s*(=|:|on\b|\()", rest) else []
    return []


# ---------------------------------------------------------------- rewriting
def renamed(models, rng):
    names = [n for x in models for n in declared(x)]
    new = {}
    for k, n in enumerate(dict.fromkeys(names)):
        if n not in RESERVED:
            new[n] = rng.choice(NEW).format(k + 10)
    words = set(new.values())
    assert len(words) == len(new)

    def change(text):
        return WORD.sub(lambda m: new.get(m[0], m[0]), text)

    def one(item):
        word, rest = head(item)
        if word in ("system", "include"):
            return item
        if word == "parameter":              # quantity, value and unit stay
            parts = [re.match(r"(\s*)(\w+)(.*)", p, re.S) for p in commas(rest)]
            return word + " " + ",".join(p[1] + new.get(p[2], p[2]) + re.sub(r"^\[(\w+)\]", lambda m: f"[{new.get(m[1], m[1])}]", p[3]) for p in parts)
        if word in ("coordinate", "cyclic coordinate", "input"):
            names, colon, quantity = rest.partition(":")
            return word + " " + change(names) + colon + quantity
        if word == "function":
            names, colon, quantity = rest.rpartition(":") if ":" in rest else (rest, "", "")
            return word + " " + change(names) + colon + quantity
        return word + " " + change(rest)
    return [one(x) for x in models], new


def reordered(models, rng):
    first = [x for x in models if head(x)[0] == "system"]
    rest = [x for x in models if head(x)[0] != "system"]
    rng.shuffle(rest)
    return first + [with_summands(x, lambda parts: rng.sample(parts, len(parts))) for x in rest], {}


def split(models, rng):
    out = []
    for item in models:
        word, rest = head(item)
        parts = summands(rest.partition("=")[2]) if word in TERMS else []
        if len(parts) < 2 or not declared(item):
            out.append(item)
            continue
        out += [f"{word} {declared(item)[0]}_part{k} = {'-' if sign == '-' else ''}{x}" for k, (sign, x) in enumerate(parts)]
    return out, {}


def with_summands(item, arrange):
    word, rest = head(item)
    if word not in TERMS:
        return item
    name, equals, body = rest.partition("=")
    parts = arrange(summands(body if equals else rest))
    text = "".join((" " if k else "") + (sign + " " if k else sign.replace("+", "")) + x for k, (sign, x) in enumerate(parts))
    return f"{word} {name}= {text}" if equals else f"{word} {text}"


def summands(body):
    """The parts of a formula at its + and - outside brackets and bars, each with its sign."""
    out, depth, bars, sign, text = [], 0, 0, "+", ""
    body = " ".join(body.split())
    for k, c in enumerate(body):
        depth += (c in "([") - (c in ")]")
        bars ^= c == "|"
        spaced = 0 < k < len(body) - 1 and body[k - 1] == " " and body[k + 1] == " "
        if c in "+-" and not depth and not bars and spaced:
            out.append((sign, text.strip()))
            sign, text = c, ""
        elif c == "-" and not text.strip() and not out:
            sign = "-"
        else:
            text += c
    return out + [(sign, text.strip())]


# ---------------------------------------------------------------- comparing
def verdict(sheet, new, blame):
    """What must stay, with the names of the original."""
    old = {v: k for k, v in new.items()}

    def back(name):
        return WORD.sub(lambda m: old.get(m[0], m[0]), name or "")
    out = {"energy": (sheet["energy"]["conserved"], "undecided" in sheet["energy"])}
    for c in sheet["coordinates"]:
        out["coordinate " + back(c["name"])] = (c["cyclic"], c["momentum_conserved"])
    for s in sheet["symmetries"]:
        terms = [back(b["term"]) for b in s.get("broken_by") or []]
        blamed = {"names": sorted(set(terms)), "size": len(set(terms)), "any": bool(terms)}[blame]
        taken = sorted(map(back, s.get("taken_by") or []))
        rate = (s.get("rate") or {}).get("plain") == "0"
        out["symmetry " + back(s["name"])] = (s["status"], blamed, taken, rate, s.get("undecided"))
    for c in sheet["conserved"]:
        out["conserved " + back(c["name"])] = (c.get("holds"), c.get("undecided"))
    return out


def codes(sheet):
    return collections.Counter(f["code"] for f in sheet["findings"])


REWRITES = [("new names", renamed, "names"), ("another order", reordered, "size"), ("terms split", split, "any")]


def check(job):
    command, path, seeds = job
    name = os.path.basename(path)[:-6]
    report, prog = sheets.Report(name), program.Program(command)
    with tempfile.TemporaryDirectory() as folder:
        for shared in os.listdir(os.path.dirname(path)):
            if shared.endswith(".least"):
                shutil.copy(os.path.join(os.path.dirname(path), shared), folder)
        with open(path, encoding="utf-8") as f:
            models = items(f.read())

        def sheet_of(lines):
            with open(os.path.join(folder, "model.least"), "w", encoding="utf-8") as f:
                f.write("\n".join(lines) + "\n")
            return prog.sheet(os.path.join(folder, "model.least"))
        try:
            base = sheet_of(models)
            for what, rewrite, blame in REWRITES:
                for seed in range(seeds if rewrite is not split else 1):
                    text, new = rewrite(models, random.Random(f"{name}/{seed}"))
                    other = sheet_of(text)
                    want, got = verdict(base, {}, blame), verdict(other, new, blame)
                    differ = {k: (want.get(k), got.get(k)) for k in want.keys() | got.keys() if want.get(k) != got.get(k)}
                    good = report.check(not differ, what, differ)
                    if rewrite is renamed:
                        good &= report.check(codes(base) == codes(other), "codes of findings under new names", f"{codes(base)} became {codes(other)}")
                    if not good:
                        report.lines += ["    " + line for item in text for line in item.splitlines()]
                        break
        except program.NoSheet as x:
            report.check(False, "sheet", x)
        except (KeyError, TypeError, AttributeError) as x:
            report.check(False, "the sheet's form", f"{type(x).__name__} {x}")
    return report


def shared_cases():
    """The folder of worked cases, or nothing: LEASTWISE_CASES, else ../shared/cases beside the repository."""
    folder = os.environ.get("LEASTWISE_CASES") or os.path.join(HERE, "..", "..", "..", "shared", "cases")
    return folder if os.path.isdir(folder) else None


def models(only=None):
    """The paths of all models at hand."""
    folders = FOLDERS + ([shared_cases()] if shared_cases() else [])
    paths = [os.path.join(d, f) for d in folders for f in sorted(os.listdir(d)) if f.endswith(".least") and f != "site.least"]
    return [p for p in paths if only in (None, os.path.basename(p)[:-6])]


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only")
    ap.add_argument("--seeds", type=int, default=2)
    o = ap.parse_args(arguments)
    paths, without = models(o.only), not shared_cases()
    if without:
        print("not run: verdicts on the worked cases (no folder; LEASTWISE_CASES names it)")
    with multiprocessing.Pool(2) as pool:
        reports = pool.map(check, [(o.program, p, o.seeds) for p in paths], chunksize=2)
    for r in reports:
        for line in r.lines:
            print(line)
    passed, failed = sum(r.passed for r in reports), sum(r.failed for r in reports)
    failed += without and os.environ.get("LEASTWISE_REQUIRE_ALL") == "1"
    print(f"{len(reports)} models rewritten: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
