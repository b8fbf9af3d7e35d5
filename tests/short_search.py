"""A search that is over in seconds, and the rule that it ends with when nothing disturbs it."""

import pytest

import simplexcub as sc
from simplexcub.search import driver

# One short round of 2 walks and 12 chunks of starts, whatever the usual ones are.
PLAN = {"WALKS": (2,), "ABREAST": 2, "CHUNKS": (12,), "STRUCTURES": (4,), "AGREE": (10**9,)}
CASE = {"degree": 3, "symmetry": "cyclic", "digits": 20, "budget": 600.0}


@pytest.fixture(autouse=True)
def short_plan(monkeypatch):
    for name, value in PLAN.items():
        monkeypatch.setattr(driver, name, value)


def search(**options):
    return sc.solve(sc.hilbert_schmidt(3), **{**CASE, **options})


@pytest.fixture(scope="module", name="alone")
def undisturbed():
    """The rule of a search in this process."""
    with pytest.MonkeyPatch.context() as patch:
        for name, value in PLAN.items():
            patch.setattr(driver, name, value)
        return search()
