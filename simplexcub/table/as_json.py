"""The native form: one JSON object whose checksum covers every other field."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from typing import Any, NoReturn

from simplexcub.errors import TableError
from simplexcub.measures import Measure
from simplexcub.rule import Rule
from simplexcub.table.foreign import foreign_rule
from simplexcub.table.record import from_record, to_record
from simplexcub.table.sanity import LONGEST_NUMBER

FORMAT = "simplexcub-rule"
VERSION = 1


def export(rule: Rule) -> str:
    """The rule as JSON text, one node per line."""
    record = {"format": FORMAT, "version": VERSION, **to_record(rule)}
    record["sha256"] = checksum(record)
    order = ("measure", "space", "degree", "symmetry", "equal_weights", "digits", "verification", "provenance")
    last = ("integer_weights", "embedded", "orbits", "nodes", "weights", "sha256")
    keys = ("format", "version", *order, "also", *last)
    lines = [f" {json.dumps(key)}: {_value(key, record[key])}" for key in keys if key in record]
    return "{\n" + ",\n".join(lines) + "\n}\n"


def checksum(record: Mapping[str, Any]) -> str:
    """SHA-256 of the canonical text: sorted keys, no spaces, UTF-8, without the field ``sha256`` itself."""
    rest = {key: value for key, value in record.items() if key != "sha256"}
    text = json.dumps(rest, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return hashlib.sha256(text.encode("utf-8")).hexdigest()


def parse(text: str, where: str, measure: Measure | None = None, *, damaged: bool = False) -> Rule:
    """The rule in a JSON text: our own form, or any object with ``nodes`` and ``weights``.

    Parameters
    ----------
    text, where : str
        The text, and the name of its file for messages.
    measure : Measure, optional
        What a table that does not name its measure is for.
    damaged : bool, optional
        Read on where the checksum is missing or wrong.

    Raises
    ------
    TableError
        Not JSON, cut short, changed since it was written, or not a rule.
    """
    record = _load(text, where)
    if "format" not in record and {"nodes", "weights"} <= record.keys():
        return _foreign(record, where, measure)
    if record.get("format") != FORMAT:
        raise TableError(f"{where}: format must be {FORMAT!r}", repr(record.get("format")))
    version = record.get("version")
    if version != VERSION or isinstance(version, bool):
        raise TableError(f"{where}: version must be {VERSION}", repr(version), "A newer simplexcub may read it.")
    if not damaged:
        _check_checksum(record, where)
    return from_record({k: v for k, v in record.items() if k not in ("format", "version", "sha256")}, where)


def _check_checksum(record: Mapping[str, Any], where: str) -> None:
    remedy = "Take an unchanged copy, or mend this one; to edit numbers export it as CSV, which has no checksum."
    if "sha256" not in record:
        raise TableError(f"{where}: a table must carry its sha256", "none", remedy)
    try:
        found = checksum(record)
    except UnicodeEncodeError:
        raise TableError(f"{where}: text must be Unicode", "an unpaired surrogate", remedy) from None
    if record["sha256"] != found:
        raise TableError(
            f"{where}: sha256 must match the content, {found[:12]}…", f"{str(record['sha256'])[:12]}…", remedy
        )


def _load(text: str, where: str) -> dict[str, Any]:
    def unique(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        result = dict(pairs)
        if len(result) < len(pairs):
            seen: set[str] = set()
            twice = next(key for key, _ in pairs if key in seen or seen.add(key))  # type: ignore[func-returns-value]
            raise TableError(f"{where}: every key must occur once", repr(twice))
        return result

    def refuse(constant: str) -> NoReturn:
        raise TableError(f"{where}: numbers must be finite", constant)

    try:
        record = json.loads(
            text, object_pairs_hook=unique, parse_constant=refuse, parse_float=_Literal, parse_int=_integer
        )
    except json.JSONDecodeError as error:
        cut = not text[error.pos :].strip() or error.msg.startswith("Unterminated")
        found = "a file that is cut short" if cut else f"{error.msg} at line {error.lineno}, column {error.colno}"
        raise TableError(f"{where} must be complete JSON", found, "Take an unchanged copy.") from None
    except (RecursionError, ValueError) as error:
        if isinstance(error, TableError):
            raise
        raise TableError(f"{where} must be plain JSON", "nesting or numbers beyond all sense") from None
    if not isinstance(record, dict):
        raise TableError(f"{where} must hold one JSON object", type(record).__name__)
    return record


def _integer(text: str) -> int:
    if len(text) > LONGEST_NUMBER:  # Python's own limit can be lifted by any library that is loaded
        raise ValueError("a number of too many digits")
    return int(text)


class _Literal(float):
    """A JSON number that remembers how it was written, so that no digit is lost."""

    text: str

    def __new__(cls, text: str) -> _Literal:
        number = super().__new__(cls, text)
        number.text = text
        return number


def _foreign(record: Mapping[str, Any], where: str, measure: Measure | None) -> Rule:
    nodes, weights = record["nodes"], record["weights"]
    if not isinstance(nodes, list) or not isinstance(weights, list) or len(nodes) != len(weights):
        raise TableError(f"{where}: nodes and weights must be lists of one length", "others")
    if not all(isinstance(node, list) for node in nodes):
        raise TableError(f"{where}: every node must be a list of coordinates", "others")
    rows = [[_text(item) for item in (*node, weight)] for node, weight in zip(nodes, weights, strict=True)]
    return foreign_rule(rows, [f"nodes[{k}]" for k in range(len(rows))], where, measure)


def _text(item: Any) -> str:
    return item.text if isinstance(item, _Literal) else str(item)


def _value(key: str, value: Any) -> str:
    """Compact JSON, with long lists one item per line."""
    if key in ("nodes", "weights", "orbits"):
        items = ",\n".join("  " + json.dumps(item, ensure_ascii=False) for item in value)
        return f"[\n{items}\n ]"
    return json.dumps(value, ensure_ascii=False)
