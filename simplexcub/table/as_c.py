"""C99: nodes and weights as constant arrays with all digits, and a function that applies the rule.

The file serves as a header and as a source file. Numbers are ``double``; a program that defines ``RULE_LONG_DOUBLE``
before it includes the file gets ``long double``, for which the literals then carry the suffix L.
"""

from __future__ import annotations

from simplexcub.rule import Rule
from simplexcub.table.program import header, name, real

_USAGE = """\
Use: include this file; then, with
         static double f(const double *x, void *p) {{ (void)p; return x[0] * x[0]; }}
     the mean of f is {name}_mean(f, 0).
Define RULE_LONG_DOUBLE before that for long double in place of double."""
_CODE = """\
#ifndef {guard}
#define {guard}

#ifndef RULE_REAL
#ifdef RULE_LONG_DOUBLE
typedef long double rule_real;
#define RULE_REAL(x) x##L
#else
typedef double rule_real;
#define RULE_REAL(x) x
#endif
#endif

enum {{ {name}_n = {n}, {name}_size = {size}, {name}_degree = {degree} }};

static const rule_real {name}_nodes[{size}][{n}] = {{
{nodes}
}};

static const rule_real {name}_weights[{size}] = {{
{weights}
}};

/* The sum of weight times f(node, context): the mean of f. */
static inline rule_real {name}_mean(rule_real (*f)(const rule_real *, void *), void *context)
{{
    rule_real total = 0;
    for (int k = 0; k < {size}; ++k)
        total += {name}_weights[k] * f({name}_nodes[k], context);
    return total;
}}

#endif
"""


def export(rule: Rule) -> str:
    """The rule as C99 source."""
    called = name(rule)
    comment = [*header(rule), "", *_USAGE.format(name=called).splitlines()]
    lines = [f" * {line}".rstrip() for line in comment]
    code = _CODE.format(
        guard=f"{called.upper()}_H",
        name=called,
        n=rule.measure.N,
        size=len(rule),
        degree=rule.degree,
        nodes=",\n".join(_row(node) for node in rule.node_decimals),
        weights=",\n".join(f"    RULE_REAL({real(weight)})" for weight in rule.weight_decimals),
    )
    return "\n".join(["/*", *lines, " */", "", code])


def _row(node: tuple[str, ...]) -> str:
    return "    {" + ",\n     ".join(f"RULE_REAL({real(x)})" for x in node) + "}"
