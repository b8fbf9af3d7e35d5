"""The command that draws, and the errors of the shipped rules that it can draw."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from conftest import Call
from scipy.integrate import quad
from test_picture import HS

from simplexcub.average.functions import spectral_function
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import (
    bures,
    flat,
    hilbert_schmidt,
)
from simplexcub.picture import ENDINGS, encode, kind_of
from simplexcub.picture.errors import measure_errors
from simplexcub.picture.notebook import html
from simplexcub.table import catalogue


def test_errors_are_against_the_exact_mean() -> None:
    found = measure_errors(spectral_function("von-neumann"), hilbert_schmidt(2))
    assert found.against == "the exact mean"
    assert found.reference == pytest.approx(1 / 3, abs=1e-15)  # Page 1993: 1/3 + 1/4 − 1/4
    assert [error.degree for error in found.rules] == list(range(1, 42, 2))
    assert [error.nodes for error in found.rules] == list(range(1, 22))
    assert all(abs(error.value - 1 / 3) == pytest.approx(error.error, abs=1e-15) for error in found.rules)
    assert found.rules[-1].error < 1e-4 * found.rules[0].error


def test_polynomials_are_exact_from_their_degree_on() -> None:
    found = measure_errors(spectral_function("purity"), hilbert_schmidt(3))
    assert found.reference == 0.6
    assert [error.error < 1e-14 for error in found.rules] == [error.degree >= 2 for error in found.rules]
    # var p_2 = E[p_2²] − E[p_2]², from the exact moments.
    variance = float(hilbert_schmidt(3).power_sum_covariance(2, 2))
    assert found.spread == pytest.approx(np.sqrt(variance))


@pytest.mark.parametrize("name", ["tsallis-1/2", "power-sum-3/2"])
def test_real_powers_have_an_exact_mean_too(name: str) -> None:
    found = measure_errors(spectral_function(name), bures(2))
    assert found.against == "the exact mean"
    assert found.rules[-1].error < 1e-2 * found.rules[0].error


def test_without_a_formula_a_finer_rule_is_the_reference() -> None:
    found = measure_errors(spectral_function("renyi-1/2"), flat(2))
    assert found.against == "a product rule of degree 255"
    assert found.rules[-1].degree == 41
    known = quad(lambda x: 2 * np.log(np.sqrt(x) + np.sqrt(1 - x)), 0, 1)[0]
    assert found.reference == pytest.approx(known, abs=1e-5)
    assert found.rules[-1].error == pytest.approx(abs(found.rules[-1].value - known), abs=1e-5)


def test_without_any_other_the_best_rule_is_the_reference_and_is_left_out() -> None:
    found = measure_errors(spectral_function("largest"), bures(3))
    assert found.against == "the best of them"
    shipped = sorted({item.degree for item in catalogue("bures", N=3, space="all")})
    assert found.rules[-1].degree == shipped[-2]
    with pytest.raises(NothingFound, match="0 shipped"):
        measure_errors(spectral_function("purity"), flat(9))


def test_draw_prints_the_errors_that_it_draws(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "errors.svg"
    status, out, err = call("draw", "--convergence", "von-neumann", "--measure", "flat", "-N", 2, "-o", path)
    assert (status, err) == (0, [])
    assert out[0] == "the exact mean: 0.5"  # −2 ∫ x ln x dx = 1/2
    assert out[1].split() == ["degree", "nodes", "error"]
    assert out[2].split() == ["1", "1", "1.9e-01"]  # ln 2 − 1/2
    assert path.read_bytes().endswith(b"</svg>\n")


@pytest.mark.parametrize(("name", "shown"), [("von-neumann", "von Neumann entropy, Flat"), ("purity", "purity, Flat")])
def test_the_title_of_errors_names_the_function_in_words(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, shown: str
) -> None:
    titles: list[str] = []
    monkeypatch.setattr("simplexcub.cli.draw.draw_convergence", lambda rules, title, *_, **__: titles.append(title))
    assert call("draw", "--convergence", name, "--measure", "flat", "-N", 2, "-o", tmp_path / "e.svg")[0] == 0
    assert titles[0].startswith(shown)


# The command


@pytest.mark.parametrize("kind", ENDINGS)
def test_draw_writes_the_picture_of_a_file(call: Call, kind: str, tmp_path: Path) -> None:
    path = tmp_path / f"nodes.{kind}"
    assert call("draw", "tables/flat/N3/all-full-t05-7.json", "-o", path) == (0, [], [])
    assert path.read_bytes().startswith({"svg": b"<?xml", "png": b"\x89PNG", "pdf": b"%PDF"}[kind])


def test_draw_takes_bare_numbers_with_a_measure(call: Call, tmp_path: Path) -> None:
    bare = tmp_path / "bare.csv"
    bare.write_text("0.2113,0.7887,0.5\n0.7887,0.2113,0.5\n", encoding="utf-8")
    assert call("draw", bare, "--measure", "flat", "-N", 2, "-o", tmp_path / "a.svg") == (0, [], [])
    assert call("draw", bare, "--measure", "bures", "-N", 2, "-o", tmp_path / "b.svg") == (0, [], [])
    assert (tmp_path / "a.svg").read_bytes() != (tmp_path / "b.svg").read_bytes()


@pytest.mark.parametrize(
    ("arguments", "part"),
    [
        (("rule.json", "-o", "x.gif"), "the picture's ending must be one of .svg, .png, .pdf; got x.gif"),
        (("rule.json",), "-o/--output"),
        (("rule.json", "-o", "no/such/x.svg"), "no/such/x.svg must be a path that can be written"),
        (("-o", "x.svg"), "draw must have a table to draw"),
        (("missing.json", "-o", "x.svg"), "missing.json must be a readable file"),
        (("f.json", "--convergence", "purity", "-o", "x.svg"), "--convergence must come without a file"),
        (("--convergence", "purity", "-o", "x.svg"), "--convergence must come with --measure"),
        (("--convergence", "puritee", "--measure", "flat", "-N", "2", "-o", "x.svg"), "Nearest: purity"),
    ],
)
def test_draw_refuses_in_one_line(
    call: Call, arguments: tuple[str, ...], part: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    status, out, err = call("draw", *arguments)
    assert (status, out, len(err)) == (2, [], 1)
    assert part in err[0]
    assert not list(tmp_path.iterdir())


def test_without_matplotlib_there_is_one_clear_line(
    call: Call, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("simplexcub.picture.find_spec", lambda name: None)
    path = tmp_path / "x.svg"
    status, out, err = call("draw", "tables/flat/N3/all-full-t05-7.json", "-o", path)
    assert (status, out) == (2, [])
    assert err == ["simplexcub: a picture needs matplotlib; got none here. Install it: pip install matplotlib"]
    assert not path.exists()
    monkeypatch.setattr("simplexcub.picture.notebook.available", lambda: False)
    assert "<img" not in html(HS[3])


def test_kinds() -> None:
    assert [kind_of(f"x.{kind.upper()}") for kind in ENDINGS] == list(ENDINGS)
    with pytest.raises(InputError, match="kind must be one of svg, png, pdf; got gif"):
        encode(HS[2], "gif")
