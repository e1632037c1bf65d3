"""Reads the `plain` form of a sheet's formulas and turns formulas into functions of numbers.

The plain form: `+ - * / ^` with explicit `*`, calls with parentheses, primes for time derivatives (`x'`, `x[3]'`), `U'(r)`
and `U'[1,2](x, y)` for derivatives of unspecified functions, `sum(i in 1..9: …)`, `λ_rod` for a multiplier.
Precedence from loosest: `+ -`; `* /`; unary `-`; `^`, which groups to the right.

A tree is a tuple: ("num", Fraction), ("pi",), ("name", text, order), ("call", function, args), ("fn", text, orders, args),
("add", (sign, tree)…), ("mul", (±1, tree)…), ("neg", tree), ("pow", base, exponent), ("sum", index, low, high, body).
"""
import cmath
import math
import re
import sys
import unicodedata
from fractions import Fraction

sys.setrecursionlimit(100_000)

TOKEN = re.compile(r"\s*(?:(\d+(?:\.(?!\.)\d+)?(?:[eE][+-]?\d+)?)|([^\W\d](?:\w|[\u0300-\u036f])*)|(\.\.|[-+*/^()\[\],':]))")
KNOWN = {"sin", "cos", "tan", "asin", "acos", "atan", "atan2", "sinh", "cosh", "tanh", "exp", "log", "sqrt", "abs", "sign",
         "min", "max"}


class Unreadable(Exception):
    """The text is not in the plain form."""


def tokens(text):
    text, out, i = unicodedata.normalize("NFC", text), [], 0
    while i < len(text):
        m = TOKEN.match(text, i)
        if not m:
            if not text[i:].strip():
                break
            raise Unreadable(f"at '{text[i:i + 20]}' in '{text[:60]}'")
        number, word, op = m.groups()
        out.append(("n", number) if number else ("w", word) if word else ("o", op))
        i = m.end()
    return out


class Reader:
    def __init__(self, text):
        self.text, self.tokens, self.i = text, tokens(text), 0

    def see(self, op, ahead=0):
        i = self.i + ahead
        return i < len(self.tokens) and self.tokens[i] == ("o", op)

    def take(self, op):
        if not self.see(op):
            self.fail(f"expected '{op}'")
        self.i += 1

    def fail(self, why):
        left = " ".join(v for _, v in self.tokens[self.i:self.i + 8])
        raise Unreadable(f"{why} before '{left}' in '{self.text[:80]}'")

    def whole(self):
        tree = self.addition()
        if self.i < len(self.tokens):
            self.fail("something is left over")
        return tree

    def addition(self):
        parts = [(1, self.product())]
        while self.see("+") or self.see("-"):
            sign = 1 if self.see("+") else -1
            self.i += 1
            parts.append((sign, self.product()))
        return parts[0][1] if len(parts) == 1 else ("add", *parts)

    def product(self):
        parts = [(1, self.unary())]
        while self.see("*") or self.see("/"):
            power = 1 if self.see("*") else -1
            self.i += 1
            parts.append((power, self.unary()))
        return parts[0][1] if len(parts) == 1 else ("mul", *parts)

    def unary(self):
        if self.see("-"):
            self.i += 1
            return ("neg", self.unary())
        base = self.postfix()
        if self.see("^"):
            self.i += 1
            return ("pow", base, self.unary())
        return base

    def primes(self):
        n = 0
        while self.see("'"):
            self.i, n = self.i + 1, n + 1
        return n

    def arguments(self):
        self.take("(")
        out = [self.addition()]
        while self.see(","):
            self.i += 1
            out.append(self.addition())
        self.take(")")
        return tuple(out)

    def brackets(self):
        self.take("[")
        out = [self.addition()]
        while self.see(","):
            self.i += 1
            out.append(self.addition())
        self.take("]")
        return tuple(out)

    def postfix(self):
        if self.see("("):
            self.i += 1
            tree = self.addition()
            self.take(")")
            if self.see("'"):
                self.fail("a prime on parentheses")
            return tree
        if self.i >= len(self.tokens):
            self.fail("the formula ends early")
        kind, text = self.tokens[self.i]
        self.i += 1
        if kind == "n":
            return ("num", Fraction(text))
        if kind == "o":
            self.i -= 1
            self.fail("unexpected sign")
        return self.name(text)

    def name(self, text):
        if text == "sum" and self.see("("):
            return self.bound_sum()
        if text in KNOWN and self.see("("):
            return ("call", text, self.arguments())
        if text in ("pi", "π"):
            return ("pi",)
        order = self.primes()
        index = ()
        if self.see("["):
            index = self.brackets()
            if order and self.see("("):                     # U'[1,2](x, y): the arguments' positions
                args = self.arguments()
                orders = [0] * len(args)
                for i in index:
                    orders[int(i[1]) - 1] += 1
                return ("fn", text, tuple(orders), args)
            order += self.primes()
        if self.see("("):
            args = self.arguments()
            if order and len(args) > 1:
                self.fail(f"{text}' of several arguments")
            return ("fn", (text, index) if index else text, (order,) + (0,) * (len(args) - 1), args)
        return ("name", (text, index) if index else text, order)

    def bound_sum(self):
        self.take("(")
        index = self.tokens[self.i][1]
        self.i += 1
        if self.tokens[self.i] != ("w", "in"):
            self.fail("a sum without its range")
        self.i += 1
        low = self.addition()
        self.take("..")
        high = self.addition()
        self.take(":")
        body = self.addition()
        self.take(")")
        return ("sum", index, low, high, body)


def read(text):
    """The tree of a formula in the plain form."""
    if isinstance(text, dict):
        text = text["plain"]
    return Reader(text).whole()


def integer(tree, bound):
    """The value of an index formula; `bound` gives the indices of the sums around it."""
    kind = tree[0]
    if kind == "num" and tree[1].denominator == 1:
        return tree[1].numerator
    if kind == "name" and tree[1] in bound:
        return bound[tree[1]]
    if kind == "add":
        return sum(s * integer(x, bound) for s, x in tree[1:])
    if kind == "neg":
        return -integer(tree[1], bound)
    if kind == "mul" and all(s == 1 for s, _ in tree[1:]):
        return math.prod(integer(x, bound) for _, x in tree[1:])
    raise Unreadable(f"not an index: {tree}")


class Function:
    """Formulas compiled to straight-line code, one statement for each distinct subexpression.

    `leaves` lists (name, order) of the variables in the order in which `__call__` takes their values; unspecified
    functions are asked for through `unknown(name, orders, args)`.
    """

    def __init__(self, trees, numbers):
        self.numbers, self.lines, self.seen = numbers, [], {}
        self.leaves, self.calls = [], []
        self.constants = []
        out = [self.emit(x, {}) for x in trees]
        code = "def f(x, u, k):\n" + "".join(f" {line}\n" for line in self.lines) + f" return [{', '.join(out)}]\n"
        scope = dict(numbers.scope)
        exec(compile(code, "<formulas>", "exec"), scope)
        self.code = scope["f"]

    def __call__(self, values, unknown=None):
        return self.code(values, unknown, self.constants)

    def put(self, text):
        if text not in self.seen:
            self.seen[text] = f"a{len(self.lines)}"
            self.lines.append(f"{self.seen[text]} = {text}")
        return self.seen[text]

    def constant(self, value):
        key = ("constant", value)
        if key not in self.seen:
            self.constants.append(self.numbers.number(value))
            self.seen[key] = f"k[{len(self.constants) - 1}]"
        return self.seen[key]

    def leaf(self, name, order):
        if (name, order) not in self.leaves:
            self.leaves.append((name, order))
        return f"x[{self.leaves.index((name, order))}]"

    def full(self, name, bound):
        if isinstance(name, tuple):
            return name[0] + "[" + ",".join(str(integer(i, bound)) for i in name[1]) + "]"
        return name

    def emit(self, tree, bound):
        kind = tree[0]
        if kind == "num":
            return self.constant(tree[1])
        if kind == "pi":
            return "pi"
        if kind == "name":
            if tree[1] in bound and not tree[2]:
                return self.constant(Fraction(bound[tree[1]]))
            return self.leaf(self.full(tree[1], bound), tree[2])
        if kind == "neg":
            return self.put(f"-{self.emit(tree[1], bound)}")
        if kind == "add":
            text = ""
            for sign, x in tree[1:]:
                one = self.emit(x, bound)
                text = self.put(f"{text} {'+' if sign > 0 else '-'} {one}") if text else one
            return text
        if kind == "mul":
            text = ""
            for power, x in tree[1:]:
                one = self.emit(x, bound)
                text = self.put(f"{text} {'*' if power > 0 else '/'} {one}") if text else one
            return text
        if kind == "pow":
            base, e = self.emit(tree[1], bound), exponent(tree[2])
            if e is not None and e.denominator == 1:
                return self.put(f"{base}**({e.numerator})" if e >= 0 else f"1/{base}**{-e.numerator}")
            if e == Fraction(1, 2):
                return self.put(f"sqrt({base})")
            return self.put(f"power({base}, {self.emit(tree[2], bound)})")
        args = ", ".join(self.emit(x, bound) for x in tree[-1]) if kind in ("call", "fn") else ""
        if kind == "call":
            return self.put(f"{tree[1]}({args})")
        if kind == "fn":
            return self.put(f"u({self.full(tree[1], bound)!r}, {tree[2]!r}, ({args},))")
        if kind == "sum":
            low, high = integer(tree[2], bound), integer(tree[3], bound)
            text = self.constant(Fraction(0))
            for i in range(low, high + 1):
                text = self.put(f"{text} + {self.emit(tree[4], {**bound, tree[1]: i})}")
            return text
        raise Unreadable(f"what is {kind}?")


def exponent(tree):
    """A constant rational exponent, or None."""
    if tree[0] == "num":
        return tree[1]
    if tree[0] == "neg":
        e = exponent(tree[1])
        return None if e is None else -e
    if tree[0] == "mul":
        e = Fraction(1)
        for power, x in tree[1:]:
            v = exponent(x)
            if v is None or (power < 0 and v == 0):
                return None
            e *= v**power
        return e
    return None


class Floats:
    """Double precision, real."""
    scope = {n: getattr(math, n) for n in ("sin", "cos", "tan", "asin", "acos", "atan", "atan2", "sinh", "cosh", "tanh", "exp",
                                           "log", "sqrt", "pi")}
    scope |= {"abs": abs, "min": min, "max": max, "sign": lambda x: (x > 0) - (x < 0), "power": pow}

    @staticmethod
    def number(value):
        return float(value)


class Digits:
    """mpmath, with its current precision; complex where a root or a logarithm asks for it."""

    def __init__(self):
        import mpmath as mp
        self.mp = mp
        self.scope = {n: getattr(mp, n) for n in ("sin", "cos", "tan", "asin", "acos", "atan", "atan2", "sinh", "cosh", "tanh",
                                                  "exp", "log", "sqrt", "sign", "power")}
        self.scope |= {"pi": +mp.pi, "abs": abs, "min": min, "max": max}

    def number(self, value):
        return self.mp.mpf(value.numerator) / value.denominator


def known_smooth(name):
    """A fixed function in place of the unspecified one of this name: exp(Σ aᵢ xᵢ) + sin(Σ bᵢ xᵢ) with aᵢ, bᵢ from the name.

    Returns (a, b), the coefficients of the first eight arguments.
    """
    seed = sum((i + 1) * ord(c) for i, c in enumerate(name))
    a = [Fraction(20 + (37 * seed + 29 * i) % 71, 200) for i in range(8)]
    b = [Fraction(40 + (53 * seed + 31 * i) % 67, 100) for i in range(8)]
    return a, b


def smooth_value(name, orders, args, lib=cmath):
    """The partial derivative of that function, with `lib` (math, mpmath or sympy) doing exp and sin."""
    a, b = known_smooth(name)
    one = sum(x * p.numerator / p.denominator for x, p in zip(args, a))
    two = sum(x * p.numerator / p.denominator for x, p in zip(args, b))
    n = sum(orders)
    fa = math.prod(p**k for p, k in zip(a, orders))
    fb = math.prod(p**k for p, k in zip(b, orders))
    wave = [lib.sin, lib.cos, lambda x: -lib.sin(x), lambda x: -lib.cos(x)][n % 4](two)
    return lib.exp(one) * fa.numerator / fa.denominator + wave * fb.numerator / fb.denominator
