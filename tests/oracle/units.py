"""Units, prefixes and constants against Pint and SciPy.

    units.py PROGRAM [--count 4000] [--seed 1]

The crate leastwise-quantities has an example that prints the exact factor and the exponents of each unit that it is given;
it is built and run here by cargo, PROGRAM is not needed. Random products of powers of prefixed units have to have Pint's
factor and dimension: exactly where all exponents are whole, π being the same rational number for both, else to 12 digits.
The constants have to have the values, uncertainties and units of CODATA 2022 as SciPy carries them.
"""
import argparse
import os
import random
import shutil
import subprocess
import sys
from fractions import Fraction

import mpmath
import pint
import scipy.constants

ROOT = os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__))))
BASE = ["meter", "kilogram", "second", "ampere", "kelvin", "mole", "candela"]
UNITS = {                  # symbol: Pint's name
    "m": "meter", "g": "gram", "s": "second", "A": "ampere", "K": "kelvin", "mol": "mole", "cd": "candela",
    "rad": "radian", "sr": "steradian", "Hz": "hertz", "N": "newton", "Pa": "pascal", "J": "joule", "W": "watt",
    "C": "coulomb", "V": "volt", "F": "farad", "Ω": "ohm", "S": "siemens", "Wb": "weber", "T": "tesla", "H": "henry",
    "lm": "lumen", "lx": "lux", "Bq": "becquerel", "Gy": "gray", "Sv": "sievert", "kat": "katal", "L": "liter",
    "Da": "dalton", "eV": "electron_volt",
    "°C": "delta_degree_Celsius", "min": "minute", "h": "hour", "d": "day", "au": "astronomical_unit", "°": "degree",
    "′": "arcminute", "″": "arcsecond", "ha": "hectare", "t": "tonne", "u": "unified_atomic_mass_unit",
    "r": "revolution", "%": "percent"}
PREFIXED = list(UNITS)[:31]
ALIKE = {"Ω": "\u2126", "μ": "µ", "K": "\u212a", "°": "deg"}     # other spellings of a symbol
RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def ask(lines, *arguments):
    """What the example prints for these lines."""
    command = ["cargo", "run", "--quiet", "--release", "-p", "leastwise-quantities", "--example", "units", "--"]
    done = subprocess.run(command + list(arguments), cwd=ROOT, input="".join(f"{line}\n" for line in lines),
                          capture_output=True, encoding="utf-8", timeout=600)
    if done.returncode != 0:
        raise RuntimeError(f"the example ended with {done.returncode}: {done.stderr.strip()[:500]}")
    return done.stdout.splitlines()


def spelled(exponent, rng):
    """An exponent as the language writes it."""
    if exponent == 1:
        return ""
    if exponent.denominator == 1:
        text = str(exponent)
        return text.translate(RAISED) if rng.random() < 0.5 else f"^{text}"
    return f"^({exponent})"


def written(factors, rng):
    """A unit as the language writes it; `factors` are symbols and exponents."""
    sign = rng.choice([" ", "·"])
    quotient = rng.random() < 0.6
    above = [(s, e) for s, e in factors if e > 0 or not quotient]
    below = [(s, -e) for s, e in factors if not (e > 0 or not quotient)]
    product = lambda part: sign.join(s + spelled(e, rng) for s, e in part)
    if not below:
        return product(above)
    divisor = product(below) if len(below) == 1 else f"({product(below)})"
    return f"{product(above) or '1'}/{divisor}"


def random_unit(prefixes, rng):
    """Symbols as written, Pint's names, exponents."""
    out = []
    for _ in range(rng.randint(1, 4)):
        prefix, symbol = ("", ""), rng.choice(list(UNITS))
        if symbol in PREFIXED and rng.random() < 0.6:
            prefix = rng.choice(prefixes)
        elif symbol == "t":
            prefix = rng.choice([("", ""), ("k", "kilo"), ("M", "mega"), ("G", "giga")])
        exponent = Fraction(rng.choice([-4, -3, -2, -1, 1, 1, 1, 2, 3, 4]), rng.choice([1, 1, 1, 1, 1, 2, 3]))
        text = prefix[0] + symbol
        for one, other in ALIKE.items():
            if rng.random() < 0.2 and (one == "μ" and prefix[0] == "μ" or text == one):
                text = text.replace(one, other, 1)
        out.append((text, prefix[1] + UNITS[symbol], exponent))
    return out


def pint_says(registry, factors):
    """Factor and exponents of the base units."""
    container = registry.UnitsContainer()
    for _, name, exponent in factors:
        container *= registry.UnitsContainer({name: Fraction(1)}) ** exponent
    factor, units = registry.get_base_units(container)
    powers = {str(k): Fraction(v) for k, v in units._units.items()}
    return factor, [powers.get(b, Fraction(0)) for b in BASE]


def compare(answer, whole, factor, exponents, pi):
    """What is wrong with an answer of the example, or None."""
    if answer.startswith("error"):
        return answer
    power, root, k, *own = answer.split()
    power, root, k = Fraction(power), int(root), Fraction(k)
    if [Fraction(e) for e in own] != exponents:
        return f"exponents {own}, Pint says {[str(e) for e in exponents]}"
    if whole:                        # Else Pint takes roots in floating point.
        same = root == 1 and power * pi ** int(k) == factor
        return None if same else f"factor {power} π^{k}, Pint says {factor}"
    value = mpmath.root(ratio(power), root) * mpmath.pi ** ratio(k)
    other = ratio(factor) if isinstance(factor, Fraction) else mpmath.mpf(factor)
    return None if abs(value / other - 1) < 1e-12 else f"factor {value}, Pint says {other}"


def ratio(x):
    return mpmath.mpf(x.numerator) / x.denominator


def check_units(registry, count, seed):
    rng = random.Random(seed)
    prefixes = [line.split("\t")[:2] for line in ask([], "prefixes")]
    single = [[(p + s, n + UNITS[s], Fraction(1))] for s in PREFIXED for p, n in [("", "")] + prefixes]
    single += [[(s, UNITS[s], Fraction(1))] for s in UNITS if s not in PREFIXED]
    cases = single + [random_unit(prefixes, rng) for _ in range(count)]
    texts = [written([(s, e) for s, _, e in factors], rng) for factors in cases]
    answers = ask(texts)
    if len(answers) != len(cases):
        return 0, [f"{len(cases)} units, {len(answers)} answers"]
    pi = registry.get_base_units(registry.UnitsContainer({"degree": Fraction(1)}))[0] * 180
    unknown = set(ask([], "symbols")) - set(UNITS) - {"Np", "B"}
    wrong, left_out = [f"{symbol}: Pint's name is not in this file" for symbol in sorted(unknown)], 0
    for factors, text, answer in zip(cases, texts, answers):
        try:
            expected = pint_says(registry, factors)
        except OverflowError:
            left_out += 1
            continue
        whole = all(e.denominator == 1 for _, _, e in factors)
        found = compare(answer, whole, *expected, pi)
        if found:
            wrong.append(f"{text}: {found}")
    if left_out > len(cases) // 20:
        wrong.append(f"{left_out} of {len(cases)} units could not be compared")
    return len(cases) - left_out - len(wrong), wrong


def check_refused():
    """What is no unit, or no multiple of one."""
    texts = ["kkg", "mmin", "kh", "mau", "ft", "m°", "N/m s", "dB", "Np", "m^(1/0)", "km^99999999999"]
    answers = ask(texts)
    wrong = [f"{t} is taken for a unit: {a}" for t, a in zip(texts, answers) if not a.startswith("error")]
    return len(texts) - len(wrong), wrong


def check_constants():
    rows = [line.split("\t") for line in ask([], "constants")]
    rows = [r for r in rows if r[1]]
    scipy_unit = lambda name: scipy.constants.physical_constants[name][1].replace("ohm", "Ω") or "1"
    own = ask([r[4] for r in rows])
    others = ask([scipy_unit(r[1]) for r in rows])
    passed, wrong = 0, []
    for (symbol, name, value, uncertainty, unit), mine, theirs in zip(rows, own, others):
        power, root, k = value.split()
        number = float(Fraction(power)) * float(scipy.constants.pi) ** float(Fraction(k))
        expected, _, spread = scipy.constants.physical_constants[name]
        if root != "1" or abs(number / expected - 1) > 1e-15:
            wrong.append(f"{symbol} = {number!r}, SciPy says {expected!r}")
        elif abs(float(Fraction(uncertainty)) - spread) > 1e-9 * spread:
            wrong.append(f"{symbol}: uncertainty {float(Fraction(uncertainty))}, SciPy says {spread}")
        elif mine != theirs or mine.startswith("error"):
            wrong.append(f"{symbol} in {unit}, SciPy says {scipy_unit(name)}")
        else:
            passed += 1
    if len(rows) < 40:
        wrong.append(f"only {len(rows)} constants")
    return passed, wrong


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program", nargs="?")
    ap.add_argument("--count", type=int, default=4000)
    ap.add_argument("--seed", type=int, default=1)
    o = ap.parse_args(arguments)
    if shutil.which("cargo") is None:
        print("not run: units (needs cargo)")
        return 0, int(os.environ.get("LEASTWISE_REQUIRE_ALL") == "1")
    registry = pint.UnitRegistry(non_int_type=Fraction)
    passed, wrong = 0, []
    for good, bad in [check_units(registry, o.count, o.seed), check_refused(), check_constants()]:
        passed, wrong = passed + good, wrong + bad
    for line in wrong:
        print(line)
    print(f"units and constants: {passed} passed, {len(wrong)} failed")
    return passed, len(wrong)


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
