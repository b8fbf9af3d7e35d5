"""Expressions: values by hand, the space they are given, and refusals that point at the place."""

from __future__ import annotations

import math
import pickle

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from simplexcub.average.expression import FUNCTIONS, ExpressionError, parse_expression
from simplexcub.errors import InputError
from simplexcub.measures import bures, dirichlet, flat, hilbert_schmidt, ordered

POINTS = np.array([[0.5, 0.3, 0.2], [1.0, 0.0, 0.0]])


@pytest.mark.parametrize(
    ("text", "first", "second"),
    [
        ("sum(x**2)", 0.38, 1.0),
        ("sum(sqrt(x))**2 - 1", (0.5**0.5 + 0.3**0.5 + 0.2**0.5) ** 2 - 1, 0.0),
        ("max(x)", 0.5, 1.0),
        ("min(x) + max(x)", 0.7, 1.0),
        ("x1 - x2*x3", 0.5 - 0.06, 1.0),
        ("-x1**2", -0.25, -1.0),
        ("+x2", 0.3, 0.0),
        ("2**-1**2", 0.5, 0.5),
        ("10 - 4 - 3", 3.0, 3.0),
        ("8/4/2", 1.0, 1.0),
        ("prod(1 + x)", 1.5 * 1.3 * 1.2, 2.0),
        ("mean(x)", 1 / 3, 1 / 3),
        ("sum(x*x1)", 0.5, 1.0),
        ("-sum(xlogx(x))", -(0.5 * math.log(0.5) + 0.3 * math.log(0.3) + 0.2 * math.log(0.2)), 0.0),
        ("sum(abs(x - 1/N))/2", 1 / 6, 2 / 3),
        ("sum(sort(x)*x)", 0.38, 1.0),
        ("max(x1, x2, 0.4)", 0.5, 1.0),
        ("sum(max(x, 0.25))", 1.05, 1.5),
        ("min(x2, 1e-1)", 0.1, 0.0),
        ("exp(log(x1)) + log2(x1 + 1) + sin(x2) + cos(x3) + tanh(x3)", None, None),
        ("pi*N", 3 * math.pi, 3 * math.pi),
        ("0.5", 0.5, 0.5),
        ("  x1 ", 0.5, 1.0),
    ],
)
def test_values_by_hand(text: str, first: float | None, second: float | None) -> None:
    by_hand = [math.log2(1 + a) + a + math.sin(b) + math.cos(c) + math.tanh(c) for a, b, c in POINTS.tolist()]
    expected = [first, second] if first is not None else by_hand
    np.testing.assert_allclose(parse_expression(text, flat(3))(POINTS), expected, rtol=1e-14, atol=1e-15)


@pytest.mark.parametrize(
    ("text", "spectrum", "components"),
    [
        ("sum(x**3)", "symmetric", "symmetric"),
        ("max(x)", "ordered", "ordered"),
        ("x1", "ordered", "all"),
        ("sum(sort(x)*x)", "ordered", "all"),
        ("max(sum(x**2), 0.5)", "ordered", "ordered"),
    ],
)
def test_the_space_an_expression_is_given(text: str, spectrum: str, components: str) -> None:
    for measure in (hilbert_schmidt(3), bures(3), ordered(flat(3))):
        assert parse_expression(text, measure).space == spectrum
    for measure in (flat(3), dirichlet([1, 2, 3])):
        assert parse_expression(text, measure).space == components


@pytest.mark.parametrize(
    ("text", "column", "part"),
    [
        ("sum(sqrt(x))**2 - y", 18, "names must be x, x1 to x3"),
        ("x1 + x4", 5, "names must be"),
        ("x0", 0, "names must be"),
        ("sum(x) + foo(x)", 9, "functions must be among"),
        ("sum(x", 3, "correctly bracketed"),
        ("x1 +", 4, "correctly bracketed"),
        ("", 0, "correctly bracketed"),
        ("x1 x2", 3, "correctly bracketed"),
        ("x", 0, "one number per point"),
        ("  x**2", 0, "one number per point"),
        ("sum(x1)", 4, "sum must be taken of a vector"),
        ("1 + sqrt", 4, "sqrt must have an argument"),
        ("sum(x, 1)", 7, "sum must have one argument"),
        ("sum()", 0, "plain arguments"),
        ("sum(*x)", 0, "plain arguments"),
        ("sum(x, axis=1)", 0, "plain arguments"),
        ("x1^2", 0, "write **"),
        ("x[0]", 0, "subscript"),
        ("x.T", 0, "attribute"),
        ("x1 if x2 else x3", 0, "ifexp"),
        ("x1 < x2", 0, "compare"),
        ("x1 % 2", 0, "binop"),
        ("x1 // 2", 0, "binop"),
        ("~x1", 0, "unaryop"),
        ("(lambda: 1)()", 0, "must use numbers"),
        ("[x1]", 0, "list"),
        ("__import__('os')", 0, "functions must be among"),
        ("'a'", 0, "constants must be real numbers"),
        ("x1 + True", 5, "constants must be real numbers"),
        ("2j", 0, "constants must be real numbers"),
        ("1e999", 0, "finite in double precision"),
        ("x1**1e6", 4, "exponents must be at most 1000"),
        ("x1 + λ", 5, "plain ASCII"),
        ("x1\n+x2", 2, "plain ASCII"),
    ],
)
def test_refusals_point_at_the_place(text: str, column: int, part: str) -> None:
    with pytest.raises(ExpressionError) as caught:
        parse_expression(text, flat(3))
    error = caught.value
    assert part.lower() in str(error).lower()
    assert "\n" not in str(error)
    assert error.column == column
    shown, caret = error.pointer
    assert (shown, caret) == (text, " " * column + "^")
    assert isinstance(error, InputError)
    assert pickle.loads(pickle.dumps(error)).pointer == error.pointer


@pytest.mark.parametrize(
    "text",
    ["x1" + "+x1" * 1000, "(" * 300 + "x1" + ")" * 300, "-" * 500 + "x1", "sqrt(" * 45 + "x1" + ")" * 45, "1" * 500],
)
def test_what_is_too_long_or_too_deep_is_refused(text: str) -> None:
    with pytest.raises(ExpressionError):
        parse_expression(text, flat(3))


@given(st.text(alphabet="x123+-*/()., eNpi_'[]{}:=<>!@#%&|~^\\sumaxlogrt", max_size=40))
def test_any_text_is_read_or_refused(text: str) -> None:
    try:
        f = parse_expression(text, flat(3))
    except ExpressionError as error:
        column, shape = error.column, (2,)
    else:
        with np.errstate(all="ignore"):
            column, shape = 0, f(POINTS).shape
    assert 0 <= column <= len(text)
    assert shape == (2,)


def test_every_function_of_the_list_is_in_the_docstring_of_the_grammar() -> None:
    import simplexcub.average.expression as module

    assert module.__doc__ is not None
    for name in FUNCTIONS:
        assert name in module.__doc__


def test_points_of_another_size_are_refused() -> None:
    with pytest.raises(InputError, match=r"shape \(M, 3\)"):
        parse_expression("x1", flat(3))(np.ones((2, 4)))
