"""Reading our own text table back. Its verification block is prose for people, so the rule comes back unverified."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from typing import Any

from simplexcub.errors import TableError
from simplexcub.rule import Orbit, Provenance, Rule
from simplexcub.table.as_text import NONE
from simplexcub.table.describe import EXACT_FOR, SEPARATOR
from simplexcub.table.orbits import count_nodes, expand
from simplexcub.table.record import check_head, extras_from, measure_from
from simplexcub.table.sanity import check_number
from simplexcub.table.sheet import SECOND, multiplicities

_AGAIN = "Take an unchanged copy."
_WEIGHTS = ("w", "W", SECOND)
_LEADING_CELLS = {"orbit": 3, "node": 1}


def parse(text: str, where: str) -> Rule:
    """The rule in a text table.

    Raises
    ------
    TableError
        A table that was cut short or edited out of shape.
    """
    lines = text.split("\n")
    start = next((k for k, line in enumerate(lines) if re.match(r" {1,9}(orbit|node) ", line)), None)
    if start is None:
        raise TableError(f"{where} must hold a table under its heading", "none", _AGAIN)
    said = _facts(lines[1:start])
    try:
        head, count, provenance = _heading(said, where)
        measure = measure_from(_measure_record(said["measure"]), where)
    except KeyError as error:
        raise TableError(f"{where} must state {error.args[0]!r}", "a heading without it", _AGAIN) from None
    nodes: list[tuple[str, ...]] = []
    weights: list[str] = []
    second: list[str] = []
    orbits: list[Orbit] = []
    for lead, numbers in _entries(lines[start:], where):
        place = f"{where}, entry {lead[0]}"
        values = tuple(number for label, number in numbers.items() if label not in _WEIGHTS)
        weight = numbers.get("w", numbers.get("W"))
        if weight is None or (len(lead) > 1 and "W" not in numbers):
            raise TableError(f"{place} must have its weights", "an entry without", f"It may be cut short. {_AGAIN}")
        if len(lead) == 1:
            expanded = [values]
        else:
            orbit = Orbit(_pattern(lead[2], place), values, numbers["W"])
            size = count_nodes(orbit, head["space"])
            if len(orbit.multiplicities) != len(values) or sum(orbit.multiplicities) != measure.N or size > count:
                raise TableError(f"{place} must fit its pattern and the measure", lead[2], _AGAIN)
            orbits.append(orbit)
            expanded = list(expand(orbit, head["space"]))
        nodes += expanded
        weights += [weight] * len(expanded)
        second += [numbers.get(SECOND, "")] * len(expanded)
    if len(nodes) != count:
        raise TableError(f"{where}: there must be {count} nodes", len(nodes), f"It may be cut short. {_AGAIN}")
    if any(len(node) != measure.N for node in nodes):
        raise TableError(f"{where}: every node must have {measure.N} coordinates", "another number", _AGAIN)
    return Rule(
        measure,
        node_decimals=tuple(nodes),
        weight_decimals=tuple(weights),
        provenance=provenance,
        orbits=tuple(orbits),
        **head,
        **extras_from(_extras(said, second, where), len(nodes), head["degree"], where),
    )


def _extras(said: Mapping[str, str], second: list[str], where: str) -> dict[str, Any]:
    """The optional keys of a table record that the facts tell."""
    record: dict[str, Any] = {}
    if "also" in said:
        record["also"] = said["also"].split(", ")
    if "integers" in said:
        numbers = said["integers"].partition(": ")[2].split(" ")
        record["integer_weights"] = [_integer(text, f"{where}: integers") for text in numbers]
    if "embedded" in said:
        degree = _integer(said["embedded"].rpartition(" ")[2], f"{where}: embedded degree")
        record["embedded"] = {"degree": degree, "weights": second}
    return record


def _facts(lines: Iterable[str]) -> dict[str, str]:
    """Label → text, with continued lines joined."""
    said: dict[str, str] = {}
    label = ""
    for line in lines:
        match = re.match(r"  (\S+(?: \S+)*) {2,}(\S.*)", line)
        if match is not None:
            label = match[1]
            said[label] = match[2]
        elif label and line.startswith("      "):
            said[label] += " " + line.strip()
    return said


def _heading(said: Mapping[str, str], where: str) -> tuple[dict[str, Any], int, Provenance]:
    space, degree = _exact_for(said["exact for"], where)
    record = {
        "space": space,
        "degree": degree,
        "symmetry": said["symmetry"],
        "equal_weights": said["weights"].endswith("all equal"),
        "digits": _integer(said["digits"], f"{where}: digits"),
    }
    head = check_head(record, where)
    count = _integer(re.split("[ ,]", said["nodes"])[0], f"{where}: nodes")
    made_by = re.fullmatch(r"(.*), seed (-?[0-9]{1,18}), (.*)", said["made by"])
    if made_by is None:
        raise TableError(f"{where}: 'made by' must name package, seed and date", said["made by"], _AGAIN)
    return head, count, Provenance(made_by[1], int(made_by[2]), made_by[3], said["method"])


def _exact_for(text: str, where: str) -> tuple[str, int]:
    text = text.partition(SEPARATOR)[0]
    for space, sentence in EXACT_FOR.items():
        before, after = sentence.split("{}")
        middle = text.removeprefix(before).removesuffix(after)
        if text == before + middle + after and re.fullmatch("[0-9]{1,5}", middle):
            return space, int(middle)
    raise TableError(f"{where}: 'exact for' must be as it was written", text, _AGAIN)


def _measure_record(text: str) -> dict[str, Any]:
    """``induced, N = 3, K = 5`` as a table record."""
    family, *rest = text.split(", ")
    record: dict[str, Any] = {"family": family}
    for item in rest:
        name, _, value = item.partition(" = ")
        if name == "alpha":
            record[name] = value.split(" ")
        else:
            record[name] = int(value) if re.fullmatch("[0-9]{1,9}", value) else value
    return record


def _integer(text: str, where: str) -> int:
    if not re.fullmatch("[0-9]{1,9}", text):
        raise TableError(f"{where} must be a whole number", repr(text), _AGAIN)
    return int(text)


def _pattern(text: str, where: str) -> tuple[int, ...]:
    if re.fullmatch(r"a … [b-v], all different|v1 … v[1-9][0-9]{0,3}, all different", text):
        return multiplicities(text)
    if len(text) > 1000 or not re.fullmatch(r"[a-z][0-9]*(×[0-9]{1,4})?( [a-z][0-9]*(×[0-9]{1,4})?)*", text):
        raise TableError(f"{where} must have a pattern such as a b b", repr(text), _AGAIN)
    return multiplicities(text)


def _entries(lines: list[str], where: str) -> list[tuple[list[str], dict[str, str]]]:
    """Leading cells and labelled decimals of every entry, from either layout."""
    header = _cells(lines[0])
    if header[0] not in _LEADING_CELLS:
        raise TableError(f"{where}: the columns must be as they were written", repr(lines[0].strip()), _AGAIN)
    leading = _LEADING_CELLS[header[0]]
    one_line = header[-1] in _WEIGHTS
    entries: list[tuple[list[str], dict[str, str]]] = []
    label = ""
    for line in lines[2:]:
        if not line.strip():
            break
        cells = _cells(line)
        if one_line and len(cells) == len(header):
            pairs = zip(header[leading:], cells[leading:], strict=True)
            entries.append((cells[:leading], {name: cell for name, cell in pairs if cell != NONE}))
        elif not one_line and len(cells) == leading + 2:
            label = cells[leading]
            entries.append((cells[:leading], {label: cells[-1]}))
        elif not one_line and len(cells) == 2 and entries and cells[0] not in entries[-1][1]:
            label = cells[0]
            entries[-1][1][label] = cells[1]
        elif not one_line and len(cells) == 1 and entries:
            entries[-1][1][label] += cells[0]
        else:
            raise TableError(f"{where}: the columns must be as they were written", repr(line.strip()), _AGAIN)
    for lead, numbers in entries:
        for name in numbers:
            numbers[name] = numbers[name].replace(" ", "")
            check_number(numbers[name], f"{where}, entry {lead[0]}: {name}")
    return entries


def _cells(line: str) -> list[str]:
    return re.split(" {2,}", line.strip())
