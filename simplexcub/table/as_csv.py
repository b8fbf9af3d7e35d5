"""Comma-separated rows under a header of ``# key: value`` lines, which keep all that the rule holds."""

from __future__ import annotations

import csv
import io
import json
from typing import Any

from simplexcub.errors import TableError
from simplexcub.rule import Rule
from simplexcub.table.describe import facts
from simplexcub.table.foreign import split_row
from simplexcub.table.record import from_record, orbit_record, to_record, verification_record

MARK = "# format: simplexcub-rule 1"
_JSON = ("measure", "degree", "equal_weights", "digits", "verification", "provenance")
_OPTIONAL = ("also", "integer_weights")
_PLAIN = ("space", "symmetry")
_SPOKEN = ("status", "density", "lower bound")


def export(rule: Rule) -> str:
    """The rule as CSV: header lines, a row of column names, then coordinates and weight (or both) of each node."""
    record = to_record(rule)
    spoken = {fact.label: fact.text for fact in facts(rule)}
    lines = [
        MARK,
        *(f"# {label}: {spoken[label]}" for label in _SPOKEN if label in spoken),
        f"# measure: {_dump(record['measure'])}",
        *(f"# {key}: {record[key]}" for key in _PLAIN),
        *(f"# {key}: {_dump(record[key])}" for key in ("degree", "equal_weights", "digits")),
        *(f"# {key}: {_dump(record[key])}" for key in _OPTIONAL if key in record),
        *([f"# embedded degree: {rule.embedded.degree}"] if rule.embedded else []),
        f"# nodes: {len(rule)}",
        f"# verification: {_dump(verification_record(rule))}",
        f"# provenance: {_dump(record['provenance'])}",
        *(f"# orbit: {_dump(orbit_record(orbit))}" for orbit in rule.orbits),
    ]
    body = io.StringIO()
    writer = csv.writer(body, lineterminator="\n")
    columns = [*zip(*rule.node_decimals, strict=True), rule.weight_decimals]
    names = [*(f"lambda_{i}" for i in range(1, rule.measure.N + 1)), "weight"]
    if rule.embedded:
        columns.append(rule.embedded.weight_decimals)
        names.append("embedded_weight")
    writer.writerow(names)
    writer.writerows(zip(*columns, strict=True))
    return "\n".join(lines) + "\n" + body.getvalue()


def parse(text: str, where: str) -> Rule:
    """The rule in a CSV text of our own.

    Raises
    ------
    TableError
        A header line that is missing or damaged, rows cut short, or numbers that are no rule.
    """
    record: dict[str, Any] = {"orbits": []}
    count: int | None = None
    second: int | None = None
    rows: list[list[str]] = []
    for number, line in enumerate(text.split("\n")[1:], 2):
        place = f"{where}, line {number}"
        if line.startswith("#"):
            key, colon, value = line[1:].strip().partition(": ")
            if not colon or key in _SPOKEN:
                continue
            if (key in record and key != "orbits") or (key == "nodes" and count is not None):
                raise TableError(f"{place}: every key must occur once", repr(key))
            if key in _PLAIN:
                record[key] = value
            elif key == "nodes":
                count = _load(value, f"{place}: nodes")
            elif key == "orbit":
                record["orbits"].append(_load(value, f"{place}: orbit"))
            elif key == "embedded degree":
                second = _load(value, f"{place}: embedded degree")
            elif key in (*_JSON, *_OPTIONAL):
                record[key] = _load(value, f"{place}: {key}")
            else:
                raise TableError(f"{place}: the header must hold known keys only", repr(key))
        elif line.strip() and not line.startswith("lambda_1"):
            rows.append(split_row(line))
            if len(rows[-1]) != len(rows[0]) or len(rows[0]) < 3:
                rule = f"{place}: every row must hold N coordinates and a weight"
                raise TableError(rule, f"{len(rows[-1])} entries", "Take an unchanged copy.")
    if count != len(rows):
        rule = f"{where}: there must be as many rows as the header says, {count}"
        raise TableError(rule, len(rows), "The file may be cut short; take an unchanged copy.")
    if second is not None:
        record["embedded"] = {"degree": second, "weights": [row.pop() for row in rows]}
    record["nodes"] = [row[:-1] for row in rows]
    record["weights"] = [row[-1] for row in rows]
    return from_record(record, where)


def _dump(value: Any) -> str:
    return json.dumps(value, ensure_ascii=False)


def _load(text: str, where: str) -> Any:
    try:
        return json.loads(text)
    except (ValueError, RecursionError):
        raise TableError(f"{where} must be JSON", repr(text), "Take an unchanged copy.") from None
