"""The shipped tables: an index of what there is, and the cheapest rule that is exact enough.

The tables lie in the top-level folder ``tables`` of a source checkout, and inside the package where it was installed
from a wheel. ``index.json`` is made from the tables themselves by `reindex`, so that finding one opens two files only.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from simplexcub.entropic import canonical
from simplexcub.errors import InputError, NothingFound, TableError
from simplexcub.measures import FAMILIES, Measure
from simplexcub.rule import Rule
from simplexcub.table.as_json import export, parse
from simplexcub.table.files import read_text, write_atomically
from simplexcub.table.kind import Kind, kind_of, place_for
from simplexcub.table.record import SPACES

INDEX = "index.json"
_SPECIAL = ("also", "integer_weights", "embedded")
_PACKAGE = Path(__file__).resolve().parent.parent


@dataclass(frozen=True)
class Shipped:
    """One line of the index.

    Attributes
    ----------
    measure : dict
        The measure's record, as in the table itself.
    space, symmetry, equal_weights, degree, nodes, digits
        What the rule is.
    bound : int
        No rule of this degree has fewer nodes.
    proven : bool
        Whether the table carries a proof that an exact rule lies nearby.
    file : str
        Path below the folder of tables.
    also, integer_weights, embedded
        What makes it special, if anything: more functions, integers as weights, the degree of embedded weights.
    """

    measure: Mapping[str, Any]
    space: str
    symmetry: str
    equal_weights: bool
    degree: int
    nodes: int
    bound: int
    digits: int
    proven: bool
    file: str
    also: Sequence[str] = ()
    integer_weights: bool = False
    embedded: int | None = None

    @property
    def kind(self) -> Kind:
        """What it is, apart from measure, degree and number of nodes."""
        fixed = (self.equal_weights, self.integer_weights)
        return Kind(self.space, self.symmetry, *fixed, tuple(self.also), self.embedded is not None)

    @property
    def family(self) -> str:
        """Family of the measure."""
        return str(self.measure["family"])

    @property
    def N(self) -> int:
        """Number of components."""
        return int(self.measure["N"]) if "N" in self.measure else len(self.measure["alpha"])


def folder() -> Path:
    """Where the shipped tables are."""
    inside, beside = _PACKAGE / "tables", _PACKAGE.parent / "tables"
    return inside if (inside / INDEX).is_file() else beside


def catalogue(family: str | None = None, *, N: int | None = None, space: str | None = None) -> tuple[Shipped, ...]:
    """The shipped tables, sorted by measure, N, space, what is special, and degree.

    Parameters
    ----------
    family : str, optional
        Only this family of measures.
    N : int, optional
        Only this number of components.
    space : {"all", "symmetric", "ordered"}, optional
        Only rules exact on this space.

    Raises
    ------
    InputError
        An unknown family or space.
    """
    if family is not None and family not in FAMILIES:
        raise InputError(f"measure must be one of {', '.join(FAMILIES)}", family)
    _check_space(space)
    return tuple(
        item
        for item in _index(folder())
        if family in (None, item.family) and N in (None, item.N) and space in (None, item.space)
    )


def load(
    measure: Measure,
    *,
    degree: int,
    space: str = "all",
    symmetry: str | None = None,
    equal_weights: bool = False,
    also: str | Sequence[str] = (),
    embedded: bool = False,
) -> Rule:
    """The cheapest shipped rule that is exact to `degree` or beyond: fewest nodes, then lowest degree.

    Parameters
    ----------
    measure : Measure
    degree : int
        At least 1.
    space : {"all", "symmetric", "ordered"}
        What the rule must be exact on.
    symmetry : str, optional
        Only node sets of this symmetry.
    equal_weights, embedded : bool
        Only rules of equal weights, or with embedded weights; none of them by default.
    also : str or sequence of str
        Only rules that average these functions exactly as well, such as ``entropy``.

    Raises
    ------
    InputError
        Not a measure, a degree below 1, an unknown space.
    NothingFound
        No such table is shipped; the message says how to make one.

    Examples
    --------
    >>> from simplexcub.measures import flat
    >>> load(flat(2), degree=4)
    <Rule flat(N=2), all, degree 5, 3 nodes, 50 digits>
    """
    if not isinstance(measure, Measure):
        raise InputError("measure must be a measure such as flat(3)", repr(measure))
    if isinstance(degree, bool) or not isinstance(degree, int) or degree < 1:
        raise InputError("degree must be an integer of at least 1", repr(degree))
    _check_space(space)
    wanted_also = tuple(canonical(name) for name in ((also,) if isinstance(also, str) else also))
    record = measure.parameters()
    here = folder()
    fitting = [
        item
        for item in _index(here, record)
        if item.space == space and symmetry in (None, item.symmetry)
        if item.kind.serves(equal_weights=equal_weights, also=wanted_also, embedded=embedded)
    ]
    enough = [item for item in fitting if item.degree >= degree]
    if not enough:
        highest = max((item.degree for item in fitting), default=0)
        tried = f"the shipped ones end at degree {highest}" if fitting else "none is shipped for it"
        kind = "" if symmetry is None else f"{symmetry} symmetry, "
        wanted = f"shipped table for {measure}, {space}, {kind}degree {degree}"
        command = solve_command(measure, degree, space=space, symmetry=symmetry)
        more = Kind(space, "", equal_weights, False, wanted_also, embedded)
        raise NothingFound(f"{wanted}{more.told}", tried, f"Make one: {command}{more.options}")
    best = min(enough, key=lambda item: (item.nodes, item.degree, item.file))
    return parse(read_text(here / best.file), best.file)


def solve_command(measure: Measure, degree: int, *, space: str = "all", symmetry: str | None = None) -> str:
    """The command that searches for such a rule."""
    record = measure.parameters()
    words = ["simplexcub solve", measure.family]
    words.append(f"--alpha {','.join(record['alpha'])}" if "alpha" in record else f"-N {measure.N}")
    if measure.family == "induced":
        words.append(f"-K {record['K']}")
    words.append(f"-t {degree}")
    if space != "all":
        words.append(f"--space {space}")
    if symmetry is not None:
        words.append(f"--symmetry {symmetry}")
    return " ".join(words)


def add(rule: Rule, where: Path) -> Path | None:
    """Put a rule among the tables in the folder `where`, unless one of its kind with as few nodes is there already.

    Returns
    -------
    Path or None
        The file written; tables of the same kind with more nodes are removed after that.
    """
    home = where / place_for(rule.measure)
    kind = kind_of(rule).stem(rule.degree)
    rivals = {old: int(old.stem.rsplit("-", 1)[1]) for old in home.glob(f"{kind}-*.json")}
    if any(nodes <= len(rule) for nodes in rivals.values()):
        return None
    home.mkdir(parents=True, exist_ok=True)
    path = home / f"{kind}-{len(rule)}.json"
    write_atomically(path, export(rule).encode("utf-8"))
    for old in rivals:
        old.unlink()
    return path


def reindex(where: Path) -> tuple[Shipped, ...]:
    """Write ``index.json`` anew from the tables found in the folder `where`.

    Raises
    ------
    TableError
        A table that is damaged or has no verification.
    """
    lines = sorted(_lines(where), key=_order)
    body = ",\n".join("  " + json.dumps(_told(line), ensure_ascii=False) for line in lines)
    text = f'{{\n "format": "simplexcub-index",\n "version": 1,\n "tables": [\n{body}\n ]\n}}\n'
    write_atomically(where / INDEX, text.encode("utf-8"))
    return tuple(lines)


def _told(line: Shipped) -> dict[str, Any]:
    """The fields of an index line, without those of special tables where it is none."""
    return {key: value for key, value in vars(line).items() if key not in _SPECIAL or value}


def _lines(where: Path) -> Iterator[Shipped]:
    for path in sorted(where.rglob("*.json")):
        if path.name == INDEX:
            continue
        rule = parse(read_text(path), str(path))
        found = rule.verification
        if found is None:
            raise TableError(f"{path}: a shipped table must be verified", "no verification", "Save it again.")
        yield Shipped(
            rule.measure.parameters(),
            rule.space,
            rule.symmetry,
            rule.equal_weights,
            rule.degree,
            len(rule),
            found.lower_bound,
            rule.digits,
            found.proof is not None and found.proof.get("holds") is True,
            path.relative_to(where).as_posix(),
            list(rule.also),
            bool(rule.integer_weights),
            None if rule.embedded is None else rule.embedded.degree,
        )


def _order(line: Shipped) -> tuple[object, ...]:
    parameters = str(line.measure.get("alpha", "")), line.measure.get("K", 0)
    return (
        FAMILIES.index(line.family),
        line.N,
        *parameters,
        SPACES.index(line.space),
        line.kind.told,  # plain ones first
        line.degree,
        line.nodes,
        line.file,
    )


def _index(where: Path, measure: Mapping[str, Any] | None = None) -> list[Shipped]:
    """The lines of the index, of one measure where it is given."""
    path = where / INDEX
    remedy = "Reinstall the package, or rebuild the index with: python -m simplexcub.table.build --index"
    try:
        record = json.loads(read_text(path))
        return [Shipped(**line) for line in record["tables"] if measure in (None, line["measure"])]
    except (ValueError, KeyError, TypeError) as error:
        raise TableError(f"{path} must be the index of the shipped tables", str(error), remedy) from None


def _check_space(space: str | None) -> None:
    if space is not None and space not in SPACES:
        raise InputError(f"space must be one of {', '.join(SPACES)}", space)
