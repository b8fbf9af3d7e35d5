"""The numbers of a rule arranged for print, before any format draws them.

A sheet lists orbits where these give the rule back digit for digit, and single nodes otherwise. Each entry has leading
cells (its number, what it stands for) and labelled decimals.
"""

from __future__ import annotations

from dataclasses import dataclass

from simplexcub.rule import Orbit, Rule
from simplexcub.table.orbits import count_nodes, node_weights

SECOND = "w2"  # label of the embedded weights
TOGETHER = ", W of all of them together"
_LETTERS = "abcdefghijklmnopqrstuv"  # w and W are the weights
_TO, _DIFFERENT = " … ", ", all different"
_GROUP = 10
_UNGROUPED = 20


@dataclass(frozen=True)
class Entry:
    """One orbit or node: leading cells, and decimals with their labels."""

    lead: tuple[str, ...]
    numbers: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Sheet:
    """A rule's entries, the names of their leading cells, and the sentence that explains the labels."""

    by_orbits: bool
    head: tuple[str, ...]
    labels: tuple[str, ...]
    entries: tuple[Entry, ...]
    legend: str

    @property
    def widths(self) -> list[int]:
        """Characters that each column needs when an entry is one line."""
        columns = [[name] for name in (*self.head, *self.labels)]
        for entry in self.entries:
            numbers = dict(entry.numbers)
            for column, cell in zip(columns, (*entry.lead, *(numbers.get(x, "") for x in self.labels)), strict=True):
                column.append(cell)
        return [max(len(cell) for cell in column) for column in columns]


def sheet(rule: Rule) -> Sheet:
    """Arrange the numbers of a rule."""
    shares = node_weights(rule)
    if shares is None:
        return _by_nodes(rule)
    whole = rule.space == "all"
    entries, position = [], 0
    for k, (orbit, share) in enumerate(zip(rule.orbits, shares, strict=True), 1):
        names = letters(len(orbit.values))
        numbers = list(zip(names, orbit.values, strict=True))
        if whole:
            numbers.append(("w", share))
        numbers.append(("W", orbit.weight))
        if rule.embedded:
            numbers.append((SECOND, rule.embedded.weight_decimals[position]))
        position += count_nodes(orbit, rule.space)
        entries.append(Entry((str(k), str(count_nodes(orbit, rule.space)), pattern(orbit)), tuple(numbers)))
    most = max(len(orbit.values) for orbit in rule.orbits)
    if whole:
        legend = (
            "Every different ordering of an orbit's pattern is a node. "
            f"w is the weight of each of these nodes{TOGETHER}."
        )
    else:
        legend = "Every pattern, sorted with its largest value first, is a node; W is its weight."
    labels = (*letters(most), *(("w", "W") if whole else ("W",)), *([SECOND] if rule.embedded else []))
    legend += _second(rule)
    return Sheet(True, ("orbit", "nodes", "pattern"), labels, tuple(entries), legend)


def _by_nodes(rule: Rule) -> Sheet:
    coordinates = tuple(f"λ{i}" for i in range(1, rule.measure.N + 1))
    columns = [*zip(*rule.node_decimals, strict=True), rule.weight_decimals]
    columns += [rule.embedded.weight_decimals] if rule.embedded else []
    labels = (*coordinates, "w", *([SECOND] if rule.embedded else []))
    entries = tuple(
        Entry((str(k),), tuple(zip(labels, row, strict=True))) for k, row in enumerate(zip(*columns, strict=True), 1)
    )
    what = "a point" if rule.space == "all" else "an ordered spectrum"
    names = ", ".join(coordinates) if rule.measure.N <= 3 else f"λ1, …, λ{rule.measure.N}"
    legend = f"A node is {what} {names} on the simplex; w is its weight.{_second(rule)}"
    return Sheet(False, ("node",), labels, entries, legend)


def _second(rule: Rule) -> str:
    return f" {SECOND} is its weight in the embedded rule." if rule.embedded else ""


def letters(count: int) -> tuple[str, ...]:
    """Names for the distinct values of an orbit."""
    return tuple(_LETTERS[:count]) if count <= len(_LETTERS) else tuple(f"v{i}" for i in range(1, count + 1))


def pattern(orbit: Orbit) -> str:
    """The multiplicity pattern: ``a b b``, or ``a×1 b×15`` and ``a … p, all different`` where it is shorter."""
    names = letters(len(orbit.values))
    if sum(orbit.multiplicities) <= 6:
        return " ".join(name for name, m in zip(names, orbit.multiplicities, strict=True) for _ in range(m))
    if max(orbit.multiplicities) == 1:
        return f"{names[0]}{_TO}{names[-1]}{_DIFFERENT}"
    return " ".join(f"{name}×{m}" for name, m in zip(names, orbit.multiplicities, strict=True))


def multiplicities(text: str) -> tuple[int, ...]:
    """The multiplicities that a pattern shows; the inverse of `pattern`.

    Examples
    --------
    >>> multiplicities("a b b"), multiplicities("a×1 b×15"), multiplicities("a … g, all different")
    ((1, 2), (1, 15), (1, 1, 1, 1, 1, 1, 1))
    """
    if text.endswith(_DIFFERENT):
        last = text.removesuffix(_DIFFERENT).rpartition(_TO)[2]
        return (1,) * (int(last[1:]) if last[1:] else _LETTERS.index(last) + 1)
    counts: dict[str, int] = {}
    for word in text.split(" "):
        name, _, times = word.partition("×")
        counts[name] = counts.get(name, 0) + int(times or 1)
    return tuple(counts.values())


def groups(decimal: str) -> list[str]:
    """A decimal cut into blocks of ten digits after the point, where it is long enough to need them.

    Examples
    --------
    >>> groups("0.3333333333333333333333333")
    ['0.3333333333', '3333333333', '33333']
    """
    whole, point, places = decimal.partition(".")
    if not point or len(places) <= _UNGROUPED or not places.isdigit():
        return [decimal]
    blocks = [places[i : i + _GROUP] for i in range(0, len(places), _GROUP)]
    return [f"{whole}.{blocks[0]}", *blocks[1:]]
