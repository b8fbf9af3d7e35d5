"""A small language for functions on the command line: ``sum(sqrt(x))**2 - 1``, read but never run as code.

The text is parsed to a syntax tree; the tree is walked against a short list of allowed nodes, and what is built is a
chain of numpy calls. All else — attributes, indices, comparisons, strings, keywords — is refused where it stands.

=====================================================  ================================================================
written                                                means
=====================================================  ================================================================
``2``, ``0.5``, ``1e-3``, ``pi``, ``N``                numbers; N is the number of components
``x``                                                  all components
``x1`` … ``xN``                                        one component; of a spectrum, x1 is the largest
``+ - * / **`` and brackets                            component by component
``abs sqrt exp log log2 sin cos tanh xlogx``           component by component; xlogx is t ln t, and 0 at 0
``sort``                                               components of its argument, largest first
``sum prod mean max min``                              of the components of one argument
``max(a, b, …)``, ``min(a, b, …)``                     of several arguments, component by component
=====================================================  ================================================================

Spectra are those of the Hilbert–Schmidt, induced, Bures and β families, and ordered measures. For flat, Dirichlet and
polynomial densities x1 … xN are the components in their order.
"""

from __future__ import annotations

import ast
import math
import re
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from functools import reduce
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import xlogy

from simplexcub.average.integrand import Space
from simplexcub.errors import InputError
from simplexcub.measures import BetaEnsemble, Measure, Ordered, Spectrum

FloatArray = NDArray[np.float64]
LONGEST = 2_000
DEEPEST = 40
HIGHEST_EXPONENT = 1_000.0

_ELEMENTWISE: dict[str, Callable[[Any], Any]] = {
    "abs": np.abs,
    "sqrt": np.sqrt,
    "exp": np.exp,
    "log": np.log,
    "log2": np.log2,
    "sin": np.sin,
    "cos": np.cos,
    "tanh": np.tanh,
    "xlogx": lambda t: xlogy(t, t),
}
_REDUCTIONS: dict[str, Callable[..., Any]] = {
    "sum": np.sum,
    "prod": np.prod,
    "mean": np.mean,
    "max": np.max,
    "min": np.min,
}
_PAIRWISE: dict[str, Callable[[Any, Any], Any]] = {"max": np.maximum, "min": np.minimum}
_OPERATORS: dict[type, Callable[[Any, Any], Any]] = {
    ast.Add: np.add,
    ast.Sub: np.subtract,
    ast.Mult: np.multiply,
    ast.Div: np.divide,
    ast.Pow: np.power,
}
_NONE = np.empty((0, 0))
FUNCTIONS = tuple(dict.fromkeys([*_REDUCTIONS, *_ELEMENTWISE, "sort"]))


class ExpressionError(InputError):
    """An expression that is refused, and the place.

    Parameters
    ----------
    rule, value, remedy
        As for :class:`InputError`.
    text : str
        The expression.
    column : int
        Where it is wrong, from 0.
    """

    def __init__(self, rule: str, value: object, remedy: str, text: str, column: int) -> None:
        super().__init__(rule, value, remedy)
        self.args = (rule, value, remedy, text, column)
        self.text = text
        self.column = column

    @property
    def pointer(self) -> tuple[str, str]:
        """The expression, and a line with a caret below the place."""
        return self.text, " " * self.column + "^"


@dataclass(frozen=True)
class Expression:
    """A function that was written as text; call it with points of shape ``(M, N)`` for values of shape ``(M,)``.

    Attributes
    ----------
    text : str
    N : int
    space : {"all", "symmetric", "ordered"}
        ``symmetric`` where only x occurs; ``ordered`` where maxima or sorting make it smooth in the ordered components
        only, or x1 … xN are those of a spectrum.
    """

    text: str
    N: int
    space: Space
    formula: Callable[[FloatArray], Any]

    def __call__(self, points: ArrayLike) -> FloatArray:
        x = np.asarray(points, dtype=np.float64)
        if x.ndim != 2 or x.shape[1] != self.N:
            raise InputError(f"points must have shape (M, {self.N})", x.shape)
        value = np.broadcast_to(np.asarray(self.formula(x), dtype=np.float64), (len(x), 1))
        return np.array(value[:, 0])


def parse_expression(text: str, measure: Measure) -> Expression:
    """The function that `text` writes, for points of `measure`.

    Raises
    ------
    ExpressionError
        Anything outside the grammar; ``column`` says where.

    Examples
    --------
    >>> from simplexcub.measures import bures
    >>> f = parse_expression("sum(sqrt(x))**2 - 1", bures(2))
    >>> f([[0.5, 0.5], [1.0, 0.0]]).round(12).tolist(), f.space
    ([1.0, 0.0], 'symmetric')
    """
    if len(text) > LONGEST:
        raise ExpressionError(f"an expression must have at most {LONGEST} characters", len(text), "", text[:60], 59)
    odd = re.search(r"[^ -~]", text)
    if odd:
        raise ExpressionError("an expression must be plain ASCII", repr(odd[0]), "Write x, * and -.", text, odd.start())
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            tree = ast.parse(text.lstrip(), mode="eval")
    except SyntaxError as error:
        column = (error.offset - 1 if error.offset else len(text)) + len(text) - len(text.lstrip())
        rule = "an expression must be complete and correctly bracketed"
        raise ExpressionError(rule, repr(text), f"See column {column + 1}.", text, min(column, len(text))) from None
    except (ValueError, RecursionError, MemoryError):
        raise ExpressionError("an expression must not be nested so deeply", repr(text), "", text, 0) from None
    reader = _Reader(text, measure.N)
    is_vector, formula = reader.read(tree.body, 0)
    if is_vector:
        remedy = "Put sum(…), prod(…), max(…) or min(…) around it."
        raise ExpressionError("an expression must be one number per point", "a vector", remedy, text, 0)
    spectrum = isinstance(measure, Spectrum | BetaEnsemble | Ordered)
    if reader.uses_components:
        space: Space = "ordered" if spectrum else "all"
    else:
        space = "ordered" if reader.uses_order else "symmetric"
    return Expression(text, measure.N, space, formula)


Read = tuple[bool, Callable[[FloatArray], Any]]  # whether it is a vector, and values of shape (M, N) or (M, 1)


class _Reader:
    """Walks a syntax tree; `uses_components` and `uses_order` tell afterwards what occurred."""

    def __init__(self, text: str, N: int) -> None:
        self.text, self.N = text, N
        self.shift = len(text) - len(text.lstrip())
        self.uses_components = self.uses_order = False

    def read(self, node: ast.expr, depth: int) -> Read:
        if depth > DEEPEST:
            raise self._error(node, f"an expression must be nested at most {DEEPEST} deep", "more")
        if isinstance(node, ast.Constant):
            return self._number(node)
        if isinstance(node, ast.Name):
            return self._name(node)
        if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub | ast.UAdd):
            vector, inner = self.read(node.operand, depth + 1)
            return vector, ((lambda x: -inner(x)) if isinstance(node.op, ast.USub) else inner)
        if isinstance(node, ast.BinOp) and type(node.op) in _OPERATORS:
            return self._operation(node, depth)
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
            return self._call(node, node.func.id, depth)
        remedy = "For a power write **." if isinstance(node, ast.BinOp) and isinstance(node.op, ast.BitXor) else ""
        what = f"{type(node).__name__.lower()} {self._segment(node)!r}"
        rule = f"an expression must use numbers, x, + - * / ** and {', '.join(FUNCTIONS)}"
        raise self._error(node, rule, what, remedy)

    def _operation(self, node: ast.BinOp, depth: int) -> Read:
        left, first = self.read(node.left, depth + 1)
        right, second = self.read(node.right, depth + 1)
        operator = _OPERATORS[type(node.op)]
        if isinstance(node.op, ast.Pow) and isinstance(node.right, ast.Constant) and second(_NONE) > HIGHEST_EXPONENT:
            rule = f"exponents must be at most {HIGHEST_EXPONENT:g}"
            raise self._error(node.right, rule, self._segment(node.right))
        return left or right, lambda x: operator(first(x), second(x))

    def _number(self, node: ast.Constant) -> Read:
        value = node.value
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise self._error(node, "constants must be real numbers", self._segment(node))
        try:
            number = float(value)
        except OverflowError:
            number = math.inf
        if not math.isfinite(number):
            raise self._error(node, "numbers must be finite in double precision", self._segment(node))
        return False, lambda _: number

    def _name(self, node: ast.Name) -> Read:
        if node.id == "x":
            return True, lambda x: x
        constants = {"N": float(self.N), "pi": math.pi}
        if node.id in constants:
            number = constants[node.id]
            return False, lambda _: number
        match = re.fullmatch(r"x([1-9]\d{0,5})", node.id)
        if match and int(match[1]) <= self.N:
            k = int(match[1]) - 1
            self.uses_components = True
            return False, lambda x: x[:, k : k + 1]
        if node.id in FUNCTIONS:
            raise self._error(node, f"{node.id} must have an argument in brackets", repr(node.id))
        raise self._error(node, f"names must be x, x1 to x{self.N}, N, pi or a function", repr(node.id))

    def _call(self, node: ast.Call, name: str, depth: int) -> Read:
        if name not in FUNCTIONS:
            raise self._error(node, f"functions must be among {', '.join(FUNCTIONS)}", repr(name))
        if node.keywords or any(isinstance(a, ast.Starred) for a in node.args) or not node.args:
            raise self._error(node, f"{name} must have plain arguments in its brackets", self._segment(node))
        if len(node.args) > 1 and name not in _PAIRWISE:
            raise self._error(node.args[1], f"{name} must have one argument", len(node.args))
        arguments = [self.read(argument, depth + 1) for argument in node.args]
        vector, inner = arguments[0]
        if name in _ELEMENTWISE:
            function = _ELEMENTWISE[name]
            return vector, lambda x: function(inner(x))
        if len(arguments) > 1:
            self.uses_order = True
            pairwise = _PAIRWISE[name]
            return any(v for v, _ in arguments), lambda x: reduce(pairwise, (a(x) for _, a in arguments))
        if not vector:
            raise self._error(node.args[0], f"{name} must be taken of a vector such as x", "a single number")
        self.uses_order |= name in ("max", "min")
        if name == "sort":
            self.uses_components = True  # sort(x)*x is not symmetric
            return True, lambda x: -np.sort(-inner(x), axis=1)
        reduction = _REDUCTIONS[name]
        return False, lambda x: reduction(inner(x), axis=1, keepdims=True)

    def _segment(self, node: ast.expr) -> str:
        return ast.get_source_segment(self.text.lstrip(), node) or self.text

    def _error(self, node: ast.expr, rule: str, value: object, remedy: str = "") -> ExpressionError:
        column = node.col_offset + self.shift
        return ExpressionError(rule, value, remedy or f"See column {column + 1}.", self.text, column)
