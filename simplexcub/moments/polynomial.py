"""Polynomials in λ_1 … λ_N with rational coefficients, read from text or a table of exponents.

The text is parsed to a syntax tree and walked with a short list of allowed nodes; nothing is ever evaluated as code.
"""

from __future__ import annotations

import ast
import math
import re
from collections import defaultdict
from collections.abc import Mapping
from fractions import Fraction

from simplexcub.errors import InputError

Polynomial = dict[tuple[int, ...], Fraction]

LONGEST_TEXT = 4_000
HIGHEST_DEGREE = 100
MOST_TERMS = 20_000
MOST_PRODUCTS = 1_000_000
_REMEDY = "Write it like (x1 - x2)^2 * x3 + 1/2, with variables x1 … xN."


def parse_polynomial(text: str, n: int) -> Polynomial:
    """The polynomial that `text` writes in the variables x1 … xn.

    Numbers are whole or decimal and are taken exactly; allowed are + − * / ( ) and ^ or ** with a whole exponent. A
    division is by a number.

    Raises
    ------
    InputError
        Anything else, a degree above 100, or more than 20000 terms.

    Examples
    --------
    >>> parse_polynomial("(x1 - 0.5*x2)^2", 2)
    {(2, 0): Fraction(1, 1), (1, 1): Fraction(-1, 1), (0, 2): Fraction(1, 4)}
    """
    if len(text) > LONGEST_TEXT:
        raise InputError(f"polynomial must be at most {LONGEST_TEXT} characters long", len(text))
    source = text.strip().replace("^", "**")
    for typed, plain in (("λ", "x"), ("−", "-"), ("·", "*"), ("²", "**2"), ("³", "**3")):
        source = source.replace(typed, plain)
    try:
        tree = ast.parse(source, mode="eval")
        return _walk(tree.body, n, source)
    except (SyntaxError, ValueError, RecursionError, MemoryError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError("polynomial must be an expression in x1 … xN", repr(text), _REMEDY) from None


def polynomial_of(given: str | Mapping[tuple[int, ...], int | str | Fraction], n: int) -> Polynomial:
    """A polynomial from text or from {exponents: coefficient}, with zero terms dropped.

    Raises
    ------
    InputError
        Text that is no polynomial, exponents of the wrong length or negative, coefficients that are not exact.
    """
    if isinstance(given, str):
        return parse_polynomial(given, n)
    total: Polynomial = defaultdict(Fraction)
    for exponents, coefficient in given.items():
        powers = tuple(exponents)
        if len(powers) != n or any(isinstance(a, bool) or not isinstance(a, int) or a < 0 for a in powers):
            raise InputError(f"each term must have {n} non-negative integer exponents", powers)
        if isinstance(coefficient, bool) or not isinstance(coefficient, int | str | Fraction):
            raise InputError("coefficients must be exact", repr(coefficient), 'Write 1/2 as "1/2".')
        try:
            total[powers] += Fraction(coefficient)
        except (ValueError, ZeroDivisionError):
            raise InputError("coefficients must be numbers such as 2, 1/2 or 0.5", repr(coefficient)) from None
    return _checked({a: x for a, x in total.items() if x})


def polynomial_text(polynomial: Mapping[tuple[int, ...], Fraction]) -> str:
    """The polynomial as text that :func:`parse_polynomial` reads back.

    Examples
    --------
    >>> polynomial_text(parse_polynomial("(x1-x2)**2", 2))
    'x1^2 - 2*x1*x2 + x2^2'
    """
    text = ""
    for exponents, x in polynomial.items():
        factors = [f"x{i}" + (f"^{a}" if a > 1 else "") for i, a in enumerate(exponents, 1) if a]
        size = abs(x)
        if size != 1 or not factors:
            factors.insert(0, str(size))
        sign = "-" if x < 0 else "+"
        text += (f" {sign} " if text else sign.replace("+", "")) + "*".join(factors)
    return text or "0"


def _walk(node: ast.expr, n: int, source: str) -> Polynomial:
    if isinstance(node, ast.Name):
        return _variable(node.id, n)
    if isinstance(node, ast.Constant):
        return _number(ast.get_source_segment(source, node) or "", n)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub | ast.UAdd):
        value = _walk(node.operand, n, source)
        return {a: -x for a, x in value.items()} if isinstance(node.op, ast.USub) else value
    if not isinstance(node, ast.BinOp):
        raise InputError("polynomial must use numbers, x1 … xN, + - * / ^ only", _segment(source, node), _REMEDY)
    left = _walk(node.left, n, source)
    if isinstance(node.op, ast.Pow):
        return _raise(left, node.right, n, source)
    right = _walk(node.right, n, source)
    if isinstance(node.op, ast.Add | ast.Sub):
        sign = 1 if isinstance(node.op, ast.Add) else -1
        total = dict(left)
        for a, x in right.items():
            total[a] = total.get(a, Fraction(0)) + sign * x
        return _checked({a: x for a, x in total.items() if x})
    if isinstance(node.op, ast.Mult):
        return _multiply(left, right)
    if isinstance(node.op, ast.Div):
        divisor = right.get((0,) * n, Fraction(0))
        if len(right) != 1 or not divisor:
            raise InputError("a polynomial must be divided by a non-zero number only", _segment(source, node), _REMEDY)
        return {a: x / divisor for a, x in left.items()}
    raise InputError("polynomial must use numbers, x1 … xN, + - * / ^ only", _segment(source, node), _REMEDY)


def _segment(source: str, node: ast.expr) -> str:
    return repr(ast.get_source_segment(source, node) or source)


def _variable(name: str, n: int) -> Polynomial:
    match = re.fullmatch(r"x_?([1-9]\d{0,5})", name, re.ASCII)
    if not match or int(match[1]) > n:
        raise InputError(f"variables must be x1 … x{n}", name)
    i = int(match[1]) - 1
    return {(0,) * i + (1,) + (0,) * (n - i - 1): Fraction(1)}


def _number(text: str, n: int) -> Polynomial:
    if not re.fullmatch(r"\d+\.?\d*|\.\d+", text, re.ASCII):
        raise InputError("numbers must be whole or decimal", repr(text), _REMEDY)
    value = Fraction(text if text[0] != "." else "0" + text)
    return {(0,) * n: value} if value else {}


def _raise(base: Polynomial, exponent: ast.expr, n: int, source: str) -> Polynomial:
    text = ast.get_source_segment(source, exponent) or ""
    if not isinstance(exponent, ast.Constant) or not re.fullmatch(r"\d{1,4}", text, re.ASCII):
        raise InputError("exponents must be whole numbers", repr(text), _REMEDY)
    power = int(text)
    degree = max((sum(a) for a in base), default=0)
    if degree * power > HIGHEST_DEGREE or power > HIGHEST_DEGREE:
        raise InputError(f"polynomial must have degree at most {HIGHEST_DEGREE}", f"power {power} of degree {degree}")
    _check_terms(min(math.comb(len(base) + power - 1, power), math.comb(degree * power + n, n)) if base else 1)
    result: Polynomial = {(0,) * n: Fraction(1)}
    for _ in range(power):
        result = _multiply(result, base)
    return result


def _multiply(left: Polynomial, right: Polynomial) -> Polynomial:
    if len(left) * len(right) > MOST_PRODUCTS:
        raise InputError(f"a product must have at most {MOST_PRODUCTS} terms to add", len(left) * len(right))
    total: Polynomial = defaultdict(Fraction)
    for a, x in left.items():
        for b, y in right.items():
            total[tuple(i + j for i, j in zip(a, b, strict=True))] += x * y
    return _checked({a: x for a, x in total.items() if x})


def _check_terms(count: int) -> None:
    if count > MOST_TERMS:
        raise InputError(f"polynomial must have at most {MOST_TERMS} terms", count)


def _checked(polynomial: Polynomial) -> Polynomial:
    degree = max((sum(a) for a in polynomial), default=0)
    if degree > HIGHEST_DEGREE:
        raise InputError(f"polynomial must have degree at most {HIGHEST_DEGREE}", degree)
    _check_terms(len(polynomial))
    return dict(sorted(polynomial.items(), reverse=True))
