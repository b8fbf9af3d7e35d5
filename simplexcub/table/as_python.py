"""A Python module that needs only numpy: nodes, weights, all digits, and the verification in its docstring."""

from __future__ import annotations

import json
import textwrap
from collections.abc import Iterable

from simplexcub.rule import Rule
from simplexcub.table.describe import facts, heading

_CODE = '''
import numpy as np

DEGREE = {degree}
MEASURE = {measure}

# Barycentric coordinates of each node, with all digits.
NODE_DECIMALS = (
{nodes}
)

# Weights, with all digits; they sum to 1.
WEIGHT_DECIMALS = (
{weights}
)

{second}nodes = np.array([[float(x) for x in node] for node in NODE_DECIMALS])
weights = np.array([float(w) for w in WEIGHT_DECIMALS])


def average(f):
    """Mean of f: the sum of weights times f(nodes); f takes shape {shape} and returns one value per node."""
    return np.tensordot(weights, np.asarray(f(nodes)), axes=1)
'''
_SECOND = """# A second set of weights, exact to degree {degree}; its difference from the first shows an error.
EMBEDDED_DEGREE = {degree}
EMBEDDED_WEIGHT_DECIMALS = (
{weights}
)
embedded_weights = np.array([float(w) for w in EMBEDDED_WEIGHT_DECIMALS])

"""


def export(rule: Rule) -> str:
    """The rule as the source of a Python module."""
    width = max(len(fact.label) for fact in facts(rule)) + 2
    lines = [f"{heading(rule)}.", ""]
    for fact in facts(rule):
        indent = " " * width
        lines += textwrap.wrap(
            f"{fact.label:<{width}}{fact.text}", 110, subsequent_indent=indent, break_long_words=False
        )
    docstring = "\n".join(lines).replace("\\", "\\\\").replace('"', '\\"')
    code = _CODE.format(
        degree=rule.degree,
        measure=_literal(rule.measure.parameters()),
        nodes="\n".join(f"    {_tuple(node)}," for node in rule.node_decimals),
        weights=_column(rule.weight_decimals),
        second=_SECOND.format(degree=rule.embedded.degree, weights=_column(rule.embedded.weight_decimals))
        if rule.embedded
        else "",
        shape=rule.nodes.shape,
    )
    return f'"""{docstring}\n"""\n{code}'


def _column(texts: Iterable[str]) -> str:
    return "\n".join(f'    "{text}",' for text in texts)


def _tuple(texts: Iterable[str]) -> str:
    return "(" + ", ".join(f'"{text}"' for text in texts) + ")"


def _literal(record: dict[str, object]) -> str:
    """JSON of strings, integers and lists of strings is Python as it stands."""
    return json.dumps(record)
