"""Reads what a run needs from a model file: values of parameters in SI units, families, runs. No formulas."""
import math
import os
import re
import unicodedata
from fractions import Fraction

BASE = {"": 1, "m": 1, "g": 1e-3, "s": 1, "A": 1, "K": 1, "mol": 1, "rad": 1, "sr": 1, "Hz": 1, "N": 1, "Pa": 1, "J": 1, "W": 1, "C": 1, "V": 1,
        "F": 1, "Ω": 1, "S": 1, "Wb": 1, "T": 1, "H": 1, "eV": 1.602176634e-19}
OTHER = {"min": 60.0, "h": 3600.0, "d": 86400.0, "°": math.pi / 180, "deg": math.pi / 180, "r": 2 * math.pi, "t": 1000.0,
         "′": math.pi / 10800, "″": math.pi / 648000, "au": 149597870700.0}
PREFIX = {"G": 1e9, "M": 1e6, "k": 1e3, "c": 1e-2, "m": 1e-3, "µ": 1e-6, "μ": 1e-6, "n": 1e-9, "p": 1e-12}
SUPER = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")


def unit_factor(text):
    """The factor of a unit such as `kg m^2/s` to SI."""
    factor = 1.0
    for k, part in enumerate(text.split("/")):
        for one in part.replace("(", " ").replace(")", " ").replace("·", " ").split():
            symbol, power = re.match(r"^(.*?)(?:\^\(?(-?\d+)\)?|([⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+))?$", one).group(1, 2)
            up = re.search(r"[⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+$", one)
            n = int(power) if power else int(up.group().translate(SUPER)) if up else 1
            factor *= unit(symbol) ** (n if k == 0 else -n)
    return factor


def unit(symbol):
    if symbol == "1":
        return 1.0
    if symbol in OTHER:
        return OTHER[symbol]
    if symbol in BASE:
        return BASE[symbol]
    if symbol[:1] in PREFIX and symbol[1:] in BASE:
        return PREFIX[symbol[0]] * BASE[symbol[1:]]
    raise ValueError(f"unit {symbol}?")


def value(text):
    """`60 mm`, `(260, 180) kg`, `4°`, `1e-3`: a float or a list of floats."""
    m = re.match(r"^\s*(\([^)]*\)|-?[\d.]+(?:[eE][+-]?\d+)?(?:/\d+)?)\s*(.*)$", text.strip())
    if not m:
        raise ValueError(f"value {text!r}?")
    number, factor = m.group(1), unit_factor(m.group(2).strip())
    if number[0] == "(":
        return [float(Fraction(x.strip())) * factor for x in number[1:-1].split(",")]
    return float(Fraction(number)) * factor


def commas(text):
    """Splits at commas outside brackets."""
    out, depth = [""], 0
    for c in text:
        depth += (c in "([") - (c in ")]")
        if c == "," and depth == 0:
            out.append("")
        else:
            out[-1] += c
    return [x.strip() for x in out]


class ModelFile:
    def __init__(self, path):
        self.parameters, self.runs, self.indices, self.integers = {}, {}, {}, {}
        self.read(path)

    def read(self, path):
        with open(path, encoding="utf-8") as f:
            text = unicodedata.normalize("NFC", f.read())
        text = "\n".join(line.split("#")[0].rstrip() for line in text.splitlines())
        for item in re.split(r"\n(?=\S)", text):
            word, _, rest = " ".join(item.split()).partition(" ")
            if word == "include":
                self.read(os.path.join(os.path.dirname(path), rest.strip('"')))
            elif word == "let" and re.fullmatch(r"\w+ = \d+", rest):
                name, number = rest.split(" = ")
                self.integers[name] = int(number)
            elif word == "index":
                names, span = rest.split(":")
                low, high = span.split("..")
                for n in commas(names):
                    self.indices[n] = (int(low), self.integers.get(high.strip()) or int(high))
            elif word == "parameter":
                self.declare(rest)
            elif word == "run":
                name, _, body = rest.partition(":")
                self.runs[name.strip()] = self.run(body)

    def declare(self, rest):
        waiting = []
        for one in commas(rest):
            name, _, given = one.partition("=")
            waiting.append(name.partition(":")[0].strip())
            if given:
                for n in waiting:
                    self.set(n, value(given))
                waiting = []
            elif ":" in name:
                waiting = []

    def set(self, name, v):
        if "[" in name:
            stem, index = name[:-1].split("[")
            low, high = self.indices[index]
            for i in range(low, high + 1):
                self.parameters[f"{stem}[{i}]"] = v[i - low] if isinstance(v, list) else v
        else:
            self.parameters[name] = v

    def run(self, body):
        start, over = {}, None
        for one in commas(body):
            one = re.sub(r"^(from|with) ", "", one)
            if one.startswith("over "):
                over = value(one[5:])
            elif "=" in one and not one.startswith("until") and "(" not in one.split("=")[0]:
                key, given = one.split("=")
                try:
                    name = key.strip().rstrip("'")
                    start[name, key.count("'")] = value(given)
                except ValueError:
                    pass                                   # a formula for an input
        return start, over
