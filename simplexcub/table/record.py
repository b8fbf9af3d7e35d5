"""A rule as a record of plain values, the shape of the native JSON table, and the strict way back."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import asdict
from typing import Any, cast, get_args

from simplexcub.embedded import Embedded
from simplexcub.entropic import canonical
from simplexcub.errors import InputError, TableError
from simplexcub.measures import Measure, from_parameters
from simplexcub.rule import Orbit, Provenance, Rule, Space, Verification
from simplexcub.table.orbits import count_nodes, expand
from simplexcub.table.sanity import LONGEST_NUMBER, check_number, check_simplex

SPACES: tuple[str, ...] = get_args(Space)
LARGEST_PARAMETER = 10_000
_ALPHA = re.compile(r"[0-9./]{1,60}")
_VERIFICATION = {
    "moments_checked": int,
    "max_residual": str,
    "worst_exponents": list,
    "fails_at_degree": int,
    "positive": bool,
    "inside": bool,
    "lower_bound": int,
    "proof": (dict, type(None)),
}
_PROVENANCE = {"package": str, "seed": int, "date": str, "method": str}
_EMBEDDED = {"degree": int, "weights": list}
_OPTIONAL = {"orbits": list, "also": list, "integer_weights": list, "embedded": dict}
_ORBIT = {"multiplicities": list, "values": list, "weight": str}
_HEAD = {"measure": dict, "space": str, "degree": int, "symmetry": str, "equal_weights": bool, "digits": int}
_RULE = {**_HEAD, "nodes": list, "weights": list, "verification": (dict, type(None)), "provenance": dict}


def to_record(rule: Rule) -> dict[str, Any]:
    """Everything the rule holds, as dicts, lists, strings, integers and booleans."""
    record: dict[str, Any] = {
        "measure": rule.measure.parameters(),
        "space": rule.space,
        "degree": rule.degree,
        "symmetry": rule.symmetry,
        "equal_weights": rule.equal_weights,
        "digits": rule.digits,
        "nodes": [list(node) for node in rule.node_decimals],
        "weights": list(rule.weight_decimals),
        "verification": verification_record(rule),
        "provenance": asdict(rule.provenance),
    }
    if rule.orbits:
        record["orbits"] = [orbit_record(orbit) for orbit in rule.orbits]
    if rule.also:
        record["also"] = list(rule.also)
    if rule.integer_weights:
        record["integer_weights"] = list(rule.integer_weights)
    if rule.embedded is not None:
        record["embedded"] = {"degree": rule.embedded.degree, "weights": list(rule.embedded.weight_decimals)}
    return record


def verification_record(rule: Rule) -> dict[str, Any] | None:
    """The verification block, or None where the rule has none."""
    if rule.verification is None:
        return None
    return {**asdict(rule.verification), "worst_exponents": list(rule.verification.worst_exponents)}


def orbit_record(orbit: Orbit) -> dict[str, Any]:
    """One entry of the ``orbits`` list."""
    return {"multiplicities": list(orbit.multiplicities), "values": list(orbit.values), "weight": orbit.weight}


def from_record(record: Mapping[str, Any], where: str) -> Rule:
    """The rule that a record describes.

    Parameters
    ----------
    record : mapping
        The keys of `to_record`; those of `_OPTIONAL` may be left out.
    where : str
        Name of the file, for messages.

    Raises
    ------
    TableError
        A key missing, unknown or of the wrong type; a number that is none.
    """
    check_keys(record, _RULE, where, optional=_OPTIONAL)
    measure = measure_from(record["measure"], where)
    head = check_head(record, where)
    nodes = tuple(_decimals(node, f"{where}: nodes[{k}]", measure.N) for k, node in enumerate(record["nodes"]))
    weights = _decimals(record["weights"], f"{where}: weights", len(nodes))
    orbits = tuple(_orbit(item, measure, f"{where}: orbits[{k}]") for k, item in enumerate(record.get("orbits", ())))
    provenance = record["provenance"]
    check_keys(provenance, _PROVENANCE, f"{where}: provenance")
    if not nodes:
        raise TableError(f"{where}: a table must have at least one node", 0)
    return Rule(
        measure,
        node_decimals=nodes,
        weight_decimals=weights,
        provenance=Provenance(**provenance),
        orbits=orbits,
        verification=verification_from(record["verification"], f"{where}: verification"),
        **extras_from(record, len(nodes), head["degree"], where),
        **head,
    )


def extras_from(record: Mapping[str, Any], nodes: int, degree: int, where: str) -> dict[str, Any]:
    """``also``, ``integer_weights`` and ``embedded`` of a table, as keyword arguments of `Rule`."""
    found: dict[str, Any] = {}
    also = record.get("also", [])
    if not all(isinstance(name, str) for name in also):
        raise TableError(f"{where}: also must be a list of names", repr(also))
    try:
        found["also"] = tuple(canonical(name) for name in also)
    except InputError as error:
        raise TableError(f"{where}: {error.rule}", error.value, error.remedy) from None
    found["integer_weights"] = _integers(record.get("integer_weights", []), f"{where}: integer_weights")
    if any(w < 1 for w in found["integer_weights"]) or len(found["integer_weights"]) not in (0, nodes):
        raise TableError(f"{where}: integer_weights must be one positive integer per node", "others")
    if "embedded" in record:
        second = record["embedded"]
        check_keys(second, _EMBEDDED, f"{where}: embedded")
        if not 0 <= second["degree"] < max(degree, 1):
            raise TableError(f"{where}: the embedded degree must be below {degree}", second["degree"])
        found["embedded"] = Embedded(
            second["degree"], _decimals(second["weights"], f"{where}: embedded weights", nodes)
        )
    return found


def check_rule(rule: Rule, where: str) -> None:
    """Refuse numbers that contradict each other, as wrong digits and changes by hand make them do.

    Raises
    ------
    TableError
        Weights or nodes off the simplex, weights that differ where they are said to be equal, or orbits that do not
        expand to the nodes.
    """
    check_simplex(rule.node_decimals, rule.weight_decimals, rule.digits, where)
    if rule.equal_weights and len(set(rule.weight_decimals)) > 1:
        raise TableError(f"{where}: weights must be equal where equal_weights is true", "weights that differ")
    if rule.orbits:
        # Counted first: a forged pattern may stand for more nodes than memory holds.
        fits = sum(count_nodes(orbit, rule.space) for orbit in rule.orbits) == len(rule)
        expanded = (node for orbit in rule.orbits for node in expand(orbit, rule.space))
        if not fits or Counter(expanded) != Counter(rule.node_decimals):
            raise TableError(
                f"{where}: orbits must expand to the nodes", "others", "Take an unchanged copy of the table."
            )


def check_head(record: Mapping[str, Any], where: str) -> dict[str, Any]:
    """The fields that say what a rule claims, checked for range, as keyword arguments of `Rule`."""
    space, degree, digits = record["space"], record["degree"], record["digits"]
    if space not in SPACES:
        raise TableError(f"{where}: space must be one of {', '.join(SPACES)}", repr(space))
    if not re.fullmatch(r"[\w()+,. -]{1,60}", record["symmetry"]):
        raise TableError(f"{where}: symmetry must be the name of a group", repr(record["symmetry"]))
    if not 0 <= degree <= 10_000:
        raise TableError(f"{where}: degree must lie between 0 and 10000", degree)
    if not 1 <= digits <= LONGEST_NUMBER:
        raise TableError(f"{where}: digits must lie between 1 and {LONGEST_NUMBER}", digits)
    head = {key: record[key] for key in _HEAD if key != "measure"}
    head["space"] = cast(Space, space)
    return head


def check_keys(record: Any, types: Mapping[str, Any], where: str, optional: Mapping[str, Any] | None = None) -> None:
    """Refuse a record that lacks a key, has an unknown one, or holds a value of another type.

    Raises
    ------
    TableError
    """
    known = {**types, **(optional or {})}
    if not isinstance(record, dict):
        raise TableError(f"{where} must be an object with keys {', '.join(types)}", type(record).__name__)
    for key in types:
        if key not in record:
            raise TableError(f"{where} must have the key {key!r}", "a table without it", "Take an unchanged copy.")
    for key, value in record.items():
        if key not in known:
            raise TableError(f"{where} must hold no keys but {', '.join(known)}", repr(key))
        kind = known[key]
        # bool is a kind of int in Python, never in a table.
        if not isinstance(value, kind) or (isinstance(value, bool) and kind is not bool):
            names = " or ".join(_PLAIN[k] for k in (kind if isinstance(kind, tuple) else (kind,)))
            raise TableError(f"{where}: {key} must be {names}", repr(value))


_PLAIN = {
    int: "an integer",
    str: "a string",
    bool: "true or false",
    list: "a list",
    dict: "an object",
    type(None): "null",
}


def measure_from(record: Any, where: str) -> Measure:
    """The measure of a table's ``measure`` field; its errors name the file."""
    if isinstance(record, dict):
        _check_size(record, where)
    try:
        return from_parameters(record)
    except InputError as error:
        raise TableError(f"{where}: {error.rule}", error.value, error.remedy) from None
    except (TypeError, ValueError, AttributeError, OverflowError):
        raise TableError(f"{where}: measure must name a family and its parameters", repr(record)) from None


def _check_size(record: Mapping[str, Any], where: str) -> None:
    """Refuse parameters so large that building the measure would take forever."""
    for name in ("N", "K"):
        value = record.get(name, 1)
        if not isinstance(value, int) or isinstance(value, bool) or value > LARGEST_PARAMETER:
            raise TableError(f"{where}: {name} must be an integer of at most {LARGEST_PARAMETER}", repr(value))
    alpha = record.get("alpha", [])
    if not isinstance(alpha, list) or not all(isinstance(a, str) and _ALPHA.fullmatch(a) for a in alpha):
        raise TableError(f'{where}: alpha must be a list of strings such as "1/2"', repr(alpha))


def verification_from(record: Any, where: str) -> Verification | None:
    """The verification block of a table, or None for null."""
    if record is None:
        return None
    check_keys(record, _VERIFICATION, where)
    check_number(record["max_residual"], f"{where}: max_residual")
    exponents = _integers(record["worst_exponents"], f"{where}: worst_exponents")
    return Verification(**{**record, "worst_exponents": exponents})


def _orbit(record: Any, measure: Measure, where: str) -> Orbit:
    check_keys(record, _ORBIT, where)
    multiplicities = _integers(record["multiplicities"], f"{where}: multiplicities")
    if sum(multiplicities) != measure.N or min(multiplicities, default=0) < 1:
        raise TableError(f"{where}: multiplicities must be positive and sum to N = {measure.N}", multiplicities)
    values = _decimals(record["values"], f"{where}: values", len(multiplicities))
    check_number(record["weight"], f"{where}: weight")
    return Orbit(multiplicities, values, record["weight"])


def _decimals(items: Any, where: str, count: int) -> tuple[str, ...]:
    if not isinstance(items, list) or not all(isinstance(item, str) for item in items):
        raise TableError(f"{where} must be a list of decimals in quotes", repr(items))
    if len(items) != count:
        raise TableError(f"{where} must hold {count} numbers", len(items))
    for k, item in enumerate(items):
        check_number(item, f"{where}[{k}]")
    return tuple(items)


def _integers(items: Sequence[Any], where: str) -> tuple[int, ...]:
    if any(isinstance(item, bool) or not isinstance(item, int) or item < 0 for item in items):
        raise TableError(f"{where} must hold integers of at least 0", repr(items))
    return tuple(items)
