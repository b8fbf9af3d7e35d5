"""Tables of exact moments as text: every mean of a monomial up to a degree, as fraction and decimal."""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import islice
from types import MappingProxyType

from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError
from simplexcub.measures import Measure
from simplexcub.moments.digamma import fraction_text
from simplexcub.moments.partitions import distinct_permutations, partitions

MOST_ROWS = 20_000


@dataclass(frozen=True)
class MomentTable:
    """Means E[λ^a] for every exponent vector a of degree 1 … `degree`; one per orbit for a symmetric measure."""

    measure: Measure
    degree: int
    digits: int
    formula: str
    rows: tuple[tuple[tuple[int, ...], Fraction], ...]


def moment_table(measure: Measure, degree: int, *, digits: int, formula: str) -> MomentTable:
    """Compute the table.

    Raises
    ------
    InputError
        A degree below 1, or more than 20000 rows.
    """
    if degree < 1:
        raise InputError("the degree of a table must be at least 1", degree)
    wanted = list(islice(_exponents(measure, degree), MOST_ROWS + 1))
    if len(wanted) > MOST_ROWS:
        raise InputError(f"a table must have at most {MOST_ROWS} rows", f"more up to degree {degree}")
    return MomentTable(measure, degree, digits, formula, tuple((a, measure.moment(a)) for a in wanted))


def _exponents(measure: Measure, degree: int) -> Iterator[tuple[int, ...]]:
    for total in range(1, degree + 1):
        for parts in partitions(total, measure.N):
            full = parts + (0,) * (measure.N - len(parts))
            if measure.is_symmetric:
                yield full
            else:
                yield from sorted(distinct_permutations(full), reverse=True)


def monomial(exponents: tuple[int, ...]) -> str:
    """The monomial as text, e.g. ``λ1^2 λ3``."""
    factors = (f"λ{i}" + (f"^{a}" if a > 1 else "") for i, a in enumerate(exponents, 1) if a)
    return " ".join(factors) or "1"


def _cells(table: MomentTable) -> list[tuple[tuple[int, ...], str, str]]:
    return [(a, fraction_text(value), to_decimal(value, table.digits)) for a, value in table.rows]


def as_text(table: MomentTable) -> str:
    """Aligned columns under the measure and the formula."""
    cells = [(monomial(a), fraction, decimal) for a, fraction, decimal in _cells(table)]
    head = ("monomial", "mean", "decimal")
    widths = [max(len(row[i]) for row in (head, *cells)) for i in range(2)]
    lines = [_title(table), f"formula: {table.formula}", ""]
    lines += [f"{row[0]:<{widths[0]}}  {row[1]:<{widths[1]}}  {row[2]}" for row in (head, *cells)]
    return "\n".join(lines) + "\n"


def as_csv(table: MomentTable) -> str:
    """One column per exponent, then the fraction and the decimal, under ``#`` lines."""
    body = io.StringIO()
    writer = csv.writer(body, lineterminator="\n")
    writer.writerow([*(f"a_{i}" for i in range(1, table.measure.N + 1)), "fraction", "decimal"])
    writer.writerows((*a, fraction, decimal) for a, fraction, decimal in _cells(table))
    record = json.dumps(table.measure.parameters(), ensure_ascii=False)
    return f"# measure: {record}\n# degree: {table.degree}\n# formula: {table.formula}\n{body.getvalue()}"


def as_json(table: MomentTable) -> str:
    """The measure's record, the formula and one object for each moment."""
    record = {
        "format": "simplexcub-moments",
        "version": 1,
        "measure": table.measure.parameters(),
        "degree": table.degree,
        "digits": table.digits,
        "formula": table.formula,
        "moments": [{"exponents": a, "fraction": f, "decimal": d} for a, f, d in _cells(table)],
    }
    return json.dumps(record, ensure_ascii=False, indent=1) + "\n"


def as_markdown(table: MomentTable) -> str:
    """A pipe table under the measure."""
    lines = [
        f"**{_title(table)}**",
        "",
        f"Formula: `{table.formula}`",
        "",
        "| monomial | mean | decimal |",
        "|---|---|---|",
    ]
    lines += [f"| {monomial(a)} | {fraction} | {decimal} |" for a, fraction, decimal in _cells(table)]
    return "\n".join(lines) + "\n"


def as_latex(table: MomentTable) -> str:
    """A longtable for a plain article that loads booktabs and longtable."""
    text = _title(table)
    for special in "_%&#":
        text = text.replace(special, "\\" + special)
    for greek, plain in (("≤", r"$\le$"), ("≥", r"$\ge$"), ("…", r"\dots{}")):
        text = text.replace(greek, plain)
    lines = [
        "% In the preamble: \\usepackage{booktabs,longtable}",
        r"\begin{longtable}{@{}lll@{}}",
        rf"\caption{{{text}}}\\",
        r"\toprule monomial & mean & decimal \\ \midrule \endfirsthead",
        r"\toprule monomial & mean & decimal \\ \midrule \endhead",
        r"\bottomrule \endfoot",
    ]
    for a, fraction, decimal in _cells(table):
        factors = "".join(rf"\lambda_{{{i}}}" + (f"^{{{k}}}" if k > 1 else "") for i, k in enumerate(a, 1) if k)
        lines.append(rf"${factors}$ & ${fraction}$ & {decimal} \\")
    return "\n".join([*lines, r"\end{longtable}"]) + "\n"


def _title(table: MomentTable) -> str:
    every = "one of each orbit, " if table.measure.is_symmetric else ""
    return f"Means of monomials, {table.measure}, {every}degree ≤ {table.degree}"


FORMATS: Mapping[str, tuple[tuple[str, ...], Callable[[MomentTable], str]]] = MappingProxyType(
    {
        "text": ((".txt", ".text"), as_text),
        "csv": ((".csv",), as_csv),
        "json": ((".json",), as_json),
        "latex": ((".tex",), as_latex),
        "markdown": ((".md", ".markdown"), as_markdown),
    }
)


def render_moments(table: MomentTable, to: str) -> str:
    """The table in one of :data:`FORMATS`.

    Raises
    ------
    InputError
        An unknown format.
    """
    if to not in FORMATS:
        raise InputError(f"format must be one of {', '.join(FORMATS)}", repr(to))
    return FORMATS[to][1](table)


def format_of(ending: str) -> str:
    """The format that a file ending such as ``.csv`` stands for.

    Raises
    ------
    InputError
        An ending that stands for none.
    """
    for name, (endings, _) in FORMATS.items():
        if ending.lower() in endings:
            return name
    known = ", ".join(endings[0] for endings, _ in FORMATS.values())
    raise InputError(f"the file must end in one of {known}", ending or "no ending", "Or choose the format with --to.")
