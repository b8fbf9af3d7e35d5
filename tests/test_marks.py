"""The published counts: well formed, possible, and found by the kind of rule they are for."""

import csv
from importlib.resources import files

import pytest

from simplexcub.measures import flat
from simplexcub.table import published
from simplexcub.verify import lower_bound

ROWS = list(csv.DictReader((files("simplexcub.table") / "published.csv").read_text(encoding="utf-8").splitlines()))


def test_every_figure_has_a_source_and_says_how_sure_it_is():
    keys = [(row["N"], row["symmetry"], row["degree"]) for row in ROWS]
    assert len(set(keys)) == len(keys) > 90
    for row in ROWS:
        assert row["symmetry"] in ("full", "any")
        assert row["source"].split()[-1].isdigit()  # ends with the year
        assert row["confidence"].startswith("from memory with ")


@pytest.mark.parametrize("symmetry", ["full", "any"])
@pytest.mark.parametrize("n", [3, 4, 5, 6, 7])
def test_no_figure_is_below_the_bound_and_none_falls_with_degree(n, symmetry):
    found = [(int(r["degree"]), int(r["nodes"])) for r in ROWS if (int(r["N"]), r["symmetry"]) == (n, symmetry)]
    assert found == sorted(found)
    nodes = [count for _, count in found]
    assert nodes == sorted(nodes)
    assert all(count >= lower_bound(flat(n), degree) for degree, count in found if degree <= 12)


def test_the_mark_is_that_of_the_kind_of_rule():
    # Witherden & Vincent (2015) and Jaśkowiec & Sukumar (2020), from memory.
    full, loose = published("flat", 4, 6, "full"), published("flat", 4, 6, "cyclic")
    assert full is not None
    assert loose is not None
    assert (full.nodes, full.symmetry, full.source) == (24, "full", "Witherden & Vincent 2015")
    assert (loose.nodes, loose.symmetry, loose.source) == (23, "any", "Jaśkowiec & Sukumar 2020")
    # Where only fully symmetric rules are published, they are the mark for others too.
    only = published("flat", 5, 4, "none")
    assert only is not None
    assert (only.nodes, only.symmetry) == (20, "full")
    assert published("flat", 3, 31, "full") is None
    assert published("hilbert-schmidt", 4, 6, "full") is None
