"""Pictures: what is drawn is the rule, and the same rule gives the same bytes."""

from __future__ import annotations

import io
import re
import subprocess
import sys
from dataclasses import replace
from decimal import Decimal
from itertools import combinations, pairwise
from pathlib import Path

import numpy as np
import pytest
from conftest import Call, package_environment
from matplotlib.collections import PathCollection
from matplotlib.figure import Figure
from matplotlib.image import imread
from matplotlib.transforms import IdentityTransform
from test_table import RULES, two_spectra, with_negative_weight

from simplexcub.average.functions import spectral_function
from simplexcub.errors import InputError, NothingFound
from simplexcub.measures import (
    Measure,
    beta_ensemble,
    bures,
    dirichlet,
    flat,
    hilbert_schmidt,
    induced,
    ordered,
    polynomial_density,
)
from simplexcub.picture import ENDINGS, draw, encode, kind_of, line, profile, style, tetrahedron, triangle
from simplexcub.picture.density import density, on_the_line
from simplexcub.picture.errors import measure_errors
from simplexcub.picture.notebook import html
from simplexcub.picture.orbits import (
    chamber_coordinates,
    chamber_points,
    node_orbits,
    pattern_word,
    sorted_profiles,
)
from simplexcub.picture.tetrahedron import hidden, projected
from simplexcub.rule import Orbit, Provenance, Rule
from simplexcub.table import load


def on_chamber(rule: Rule, space: str) -> Rule:
    """The same rule with one sorted node for each orbit, and its total weight; exact on what is symmetric."""
    weights: dict[tuple[str, ...], Decimal] = {}
    for node, weight in zip(rule.node_decimals, rule.weight_decimals, strict=True):
        key = tuple(sorted(node, key=Decimal, reverse=True))
        weights[key] = weights.get(key, Decimal(0)) + Decimal(weight)
    texts = tuple(format(weight, "f") for weight in weights.values())
    return replace(rule, space=space, node_decimals=tuple(weights), weight_decimals=texts, orbits=())


HS = {n: load(hilbert_schmidt(n), degree=5, symmetry="full") for n in (2, 3, 4, 5, 6)}
CHAMBER = {n: on_chamber(rule, "symmetric") for n, rule in HS.items()}


def painted(painter, rule: Rule) -> Figure:
    figure = Figure(figsize=painter.SIZE)
    painter.paint(figure, rule)
    return figure


def marks(axes) -> list[tuple[np.ndarray, float, bytes]]:
    """Place, area in square points, and shape of every mark, by its own outline."""
    (collection,) = [c for c in axes.collections if type(c) is PathCollection and len(c.get_paths()) > 1]
    found = []
    for path, place, size in zip(collection.get_paths(), collection.get_offsets(), collection.get_sizes(), strict=True):
        x, y = path.to_polygons()[0].T
        assert isinstance(collection.get_transform(), IdentityTransform)
        area = size * abs(np.dot(x[:-1], y[1:]) - np.dot(x[1:], y[:-1])) / 2
        found.append((np.asarray(place), float(area), path.vertices.tobytes()))
    return found


def crosses(axes) -> list[list[float]]:
    """Where crosses are."""
    return [
        place
        for c in axes.collections
        if type(c) is PathCollection and len(c.get_paths()) == 1
        for place in c.get_offsets().tolist()
    ]


# Every kind of picture


@pytest.mark.parametrize(("n", "kind"), [*((n, "svg") for n in HS), (3, "png"), (3, "pdf")])
def test_the_same_rule_gives_the_same_bytes(n: int, kind: str) -> None:
    first = encode(HS[n], kind, dpi=60)
    encode(CHAMBER[n], kind, dpi=60)
    assert encode(replace(HS[n]), kind, dpi=60) == first
    assert first.startswith({"svg": b"<?xml", "png": b"\x89PNG", "pdf": b"%PDF"}[kind])
    assert not re.search(rb"20\d\d-\d\d-\d\d|D:20\d{6}", first)


def test_another_interpreter_draws_the_same_picture(tmp_path: Path) -> None:
    """And pyplot, which keeps figures alive, is not needed for it."""
    program = (
        "import sys, simplexcub as sc\n"
        "from simplexcub.picture import draw\n"
        "draw(sc.load(sc.flat(3), degree=5), sys.argv[1])\n"
        "assert 'matplotlib.pyplot' not in sys.modules\n"
    )
    path = tmp_path / "there.svg"
    subprocess.run([sys.executable, "-c", program, str(path)], env=package_environment(), check=True, timeout=120)
    draw(load(flat(3), degree=5), tmp_path / "here.svg")
    assert (tmp_path / "here.svg").read_bytes() == path.read_bytes()


@pytest.mark.parametrize("key", RULES)
def test_every_rule_can_be_drawn(key: str) -> None:
    assert b"</svg>" in encode(RULES[key], "svg")


@pytest.mark.parametrize("n", [2, 3, 4, 6])
def test_nothing_is_cut_off_at_the_border(n: int) -> None:
    for rule in (HS[n], CHAMBER[n]):
        pixels = imread(io.BytesIO(encode(rule, "png", dpi=80)))[..., :3]
        border = np.concatenate([pixels[0], pixels[-1], pixels[:, 0], pixels[:, -1]])
        assert border.min() == 1.0
        assert pixels.min() < 0.3


# N = 3


@pytest.mark.parametrize(
    "rule", [HS[3], load(bures(3), degree=8), load(hilbert_schmidt(3), degree=9), with_negative_weight()], ids=repr
)
def test_marks_on_the_triangle_are_the_nodes_with_areas_as_weights(rule: Rule) -> None:
    found = marks(painted(triangle, rule).axes[0])
    assert len(found) == len(rule)
    # Heights above the three sides are the barycentric coordinates, in any order of the corners.
    sides = [(1, 2), (2, 0), (0, 1)]
    for place, area, _ in found:
        heights = []
        for a, b in sides:
            along = triangle.CORNERS[b] - triangle.CORNERS[a]
            offset = place - triangle.CORNERS[a]
            heights.append((along[0] * offset[1] - along[1] * offset[0]) / np.sqrt(0.75))
        k = int(np.argmin(np.abs(rule.nodes - heights).sum(axis=1)))
        assert rule.nodes[k] == pytest.approx(heights, abs=1e-9)
        total = sum(a for _, a, _ in found)
        assert area / total == pytest.approx(abs(rule.weights[k]) / np.abs(rule.weights).sum(), rel=0.02)


def test_orbits_are_told_apart_by_their_marks() -> None:
    rule = HS[3]
    looks = {}
    for place, _, look in marks(painted(triangle, rule).axes[0]):
        k = int(np.argmin(np.abs(rule.nodes @ triangle.CORNERS - place).sum(axis=1)))
        looks[k] = look
    for orbit in node_orbits(rule):
        assert len({looks[k] for k in orbit.nodes}) == 1
    assert len(set(looks.values())) == len(node_orbits(rule)) > 1


def test_negative_weights_are_crossed_out() -> None:
    assert crosses(painted(triangle, with_negative_weight()).axes[0]) == [pytest.approx([0.5, np.sqrt(0.75) / 3])]
    assert crosses(painted(triangle, HS[3]).axes[0]) == []


@pytest.mark.parametrize(
    ("rule", "sizes"),
    [
        (HS[3], [3, 6]),
        (load(hilbert_schmidt(3), degree=8, symmetry="cyclic"), [3] * 5),
        (replace(HS[3], symmetry="none"), [1] * 9),
        (replace(HS[3], symmetry="something foreign"), [1] * 9),
        (CHAMBER[3], [1, 1]),
    ],
    ids=repr,
)
def test_orbits_are_those_of_the_symmetry(rule: Rule, sizes: list[int]) -> None:
    orbits = node_orbits(rule)
    assert sorted(len(orbit.nodes) for orbit in orbits) == sizes
    assert sorted(k for orbit in orbits for k in orbit.nodes) == list(range(len(rule)))
    assert sum(orbit.weight for orbit in orbits) == pytest.approx(1)


def test_patterns_are_named() -> None:
    assert pattern_word(np.array([0.2, 0.4, 0.4])) == r"$a\,b\,b$"
    assert pattern_word(np.array([0.3] + [0.1] * 7)) == r"$a^{1}\,b^{7}$"
    assert pattern_word(np.arange(1, 10) / 45) == r"$a_1\dots a_{9}$"


# The chamber


@pytest.mark.parametrize("n", [2, 3, 4, 7])
def test_chamber_coordinates_are_barycentric_in_its_corners(n: int) -> None:
    corners = np.array([[1 / k] * k + [0.0] * (n - k) for k in range(1, n + 1)])
    assert chamber_coordinates(corners) == pytest.approx(np.eye(n))
    spectra = hilbert_schmidt(n).sample(np.random.default_rng(1), 50)
    spectra = -np.sort(-spectra, axis=1)
    inside = chamber_coordinates(spectra)
    assert inside.min() >= 0
    assert inside.sum(axis=1) == pytest.approx(np.ones(50))
    assert inside @ corners == pytest.approx(spectra)
    assert chamber_points(inside) == pytest.approx(spectra)


@pytest.mark.parametrize("space", ["symmetric", "ordered"])
def test_rules_of_ordered_spectra_are_drawn_on_the_chamber(space: str) -> None:
    rule = on_chamber(HS[3], space)
    axes = painted(triangle, rule).axes[0]
    assert {r"$(1,0,0)$", r"$(\frac{1}{2},\frac{1}{2},0)$"} <= {text.get_text() for text in axes.texts}
    places = [place for place, _, _ in marks(axes)]
    assert len(places) == len(rule)
    expected = chamber_coordinates(rule.nodes) @ triangle.CORNERS
    assert sorted(map(tuple, np.round(places, 9))) == sorted(map(tuple, np.round(expected, 9)))
    low, high = painted(line, on_chamber(HS[2], space)).axes[1].get_xlim()
    assert 0.48 < low < 0.5
    assert 1 < high < 1.02


def test_an_ordered_measure_lives_on_the_chamber_too() -> None:
    base = HS[3]
    rule = replace(on_chamber(base, "ordered"), space="all", measure=ordered(hilbert_schmidt(3)), symmetry="none")
    assert encode(rule, "svg") != encode(base, "svg")
    assert r"$(1,0,0)$" in {text.get_text() for text in painted(triangle, rule).axes[0].texts}


# N = 2


MEASURES = [
    flat(2),
    hilbert_schmidt(2),
    bures(2),
    induced(2, 4),
    dirichlet(["1/2", 3]),
    beta_ensemble(2, beta=1, exponent="1/2"),
    polynomial_density(flat(2), "x1*(x1 - x2)^2 + x2^3"),
]


@pytest.mark.parametrize("measure", MEASURES, ids=str)
def test_the_density_on_the_line_has_the_moments_of_the_measure(measure: Measure) -> None:
    x, values = on_the_line(density(measure), 0.0)
    for power in (0, 1, 2, 5):
        # The points are the midpoints of equal steps in θ, x = sin²θ.
        mean = float((values * x**power * 2 * np.sqrt(x * (1 - x))).sum()) * (np.pi / 2) / len(x)
        assert mean == pytest.approx(float(measure.moment((power, 0))), abs=1e-5)


def test_the_density_of_an_ordered_spectrum_is_twice_as_high() -> None:
    x, values = on_the_line(density(ordered(hilbert_schmidt(2))), 0.5)
    assert x.min() > 0.5
    assert values == pytest.approx(6 * (1 - 2 * x) ** 2, rel=1e-6)  # 3(1 − 2x)² on the whole line


@pytest.mark.parametrize("measure", [hilbert_schmidt(3), polynomial_density(flat(3), "x1^2*x2 + x3")], ids=str)
def test_the_density_on_the_triangle_has_the_moments_of_the_measure(measure: Measure) -> None:
    rule = load(flat(3), degree=12)  # exact for density times moment
    values = density(measure)(rule.nodes) * rule.weights
    for exponents in ((1, 0, 0), (2, 1, 0), (1, 1, 2)):
        mean = values @ np.prod(rule.nodes ** np.array(exponents), axis=1) / values.sum()
        assert mean == pytest.approx(float(measure.moment(exponents)), rel=1e-12)


def test_stems_hang_as_low_as_their_weights() -> None:
    rule = HS[2]
    below = painted(line, rule).axes[1]
    stems = {float(s.get_xdata()[0]): float(s.get_ydata()[1]) for s in below.lines if len(set(s.get_xdata())) == 1}
    assert stems == {float(x): float(w) for x, w in zip(rule.nodes[:, 0], rule.weights, strict=True)}
    assert below.yaxis_inverted()


# N = 4 and beyond


def test_the_tetrahedron_is_regular_and_has_one_hidden_edge() -> None:
    edges = [np.linalg.norm(a - b) for a, b in combinations(tetrahedron._SOLID, 2)]
    assert edges == pytest.approx([1.0] * 6)
    flat_corners, depth = projected(np.eye(4))
    assert hidden(flat_corners) == [(1, 3)]
    assert depth.argmin() == 2
    centre, middle = projected(np.full((1, 4), 0.25))
    assert centre[0] == pytest.approx(flat_corners.mean(axis=0))
    assert middle[0] == pytest.approx(depth.mean())


@pytest.mark.parametrize("rule", [HS[4], CHAMBER[4]], ids=repr)
def test_the_tetrahedron_comes_with_four_faces(rule: Rule) -> None:
    solid, *faces = painted(tetrahedron, rule).axes
    assert len(faces) == 4
    for axes in (solid, *faces):
        found = marks(axes)
        assert len(found) == len(rule)
        areas = sorted(area for _, area, _ in found)
        assert areas == pytest.approx(sorted(areas[-1] * rule.weights / rule.weights.max()), rel=0.02)
    for axes in faces:
        heights = [place[1] for place, _, _ in marks(axes)]
        assert min(heights) >= 0
        assert max(heights) <= np.sqrt(0.75)


def test_far_nodes_are_paler_and_lie_below_near_ones() -> None:
    solid = painted(tetrahedron, HS[4]).axes[0]
    (collection,) = [c for c in solid.collections if len(c.get_paths()) > 1]
    flat_nodes, depth = projected(HS[4].nodes)
    order = [int(np.argmin(np.abs(flat_nodes - place).sum(axis=1))) for place in collection.get_offsets()]
    assert (np.diff(depth[order]) <= 1e-12).all()
    ink = collection.get_edgecolor()[:, :3].sum(axis=1)
    assert (np.diff(ink) <= 1e-12).all()
    assert ink[0] > ink[-1] + 0.3


@pytest.mark.parametrize("rule", [HS[5], HS[6], CHAMBER[6]], ids=repr)
def test_profiles_fall_and_are_as_thick_as_their_weights(rule: Rule) -> None:
    axes = painted(profile, rule).axes[0]
    drawn = [x for x in axes.lines if len(x.get_xdata()) == rule.measure.N]
    weights = sorted((weight for _, weight, _ in sorted_profiles(rule)), reverse=True)
    assert sum(weights) == pytest.approx(1)
    assert len(drawn) == len(weights) < 12
    assert all((np.diff(x.get_ydata()) <= 0).all() for x in drawn)
    thick = np.array([x.get_linewidth() for x in drawn])
    clear = thick > 0.5
    assert thick[clear] / thick[0] == pytest.approx(np.array(weights)[clear] / weights[0])


def test_shapes_have_the_areas_that_geometry_gives_them() -> None:
    assert style.unit_area("s") == pytest.approx(1)
    assert style.unit_area("o") == pytest.approx(np.pi / 4, rel=0.02)
    assert style.unit_area("D") == pytest.approx(1)
    assert style.unit_area("^") == style.unit_area("v") == pytest.approx(0.5)


def test_the_first_marks_differ_without_colour() -> None:
    """By shape, and neighbours in lightness too."""
    looks = [style.mark(k) for k in range(36)]
    assert len(set(looks)) == 36
    assert len({shape for shape, _ in looks[:6]}) == 6
    light = [float(np.dot(style.blend(colour, 0.0), (0.2126, 0.7152, 0.0722))) for _, colour in looks[:6]]
    assert all(abs(a - b) > 0.15 for a, b in pairwise(light))


# Convergence


def test_errors_are_against_the_exact_mean() -> None:
    found = measure_errors(spectral_function("von-neumann"), hilbert_schmidt(2))
    assert found.exact
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
    assert found.exact
    assert found.rules[-1].error < 1e-2 * found.rules[0].error


def test_without_a_formula_the_best_rule_is_the_reference() -> None:
    found = measure_errors(spectral_function("largest"), flat(2))
    assert not found.exact
    assert found.rules[-1].degree == 39
    assert found.reference == pytest.approx(0.75, abs=1e-3)
    with pytest.raises(NothingFound, match="0 shipped"):
        measure_errors(spectral_function("purity"), flat(9))


def test_draw_prints_the_errors_that_it_draws(call: Call, tmp_path: Path) -> None:
    path = tmp_path / "errors.svg"
    status, out, err = call("draw", "--convergence", "von-neumann", "--measure", "flat", "-N", 2, "-o", path)
    assert (status, err) == (0, [])
    assert out[0] == "exact mean 0.5"  # −2 ∫ x ln x dx = 1/2
    assert out[1].split() == ["degree", "nodes", "error"]
    assert out[2].split() == ["1", "1", "1.9e-01"]  # ln 2 − 1/2
    assert path.read_bytes().endswith(b"</svg>\n")


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
    assert err == ["simplexcub: a picture needs matplotlib; got none here. Install it: pip install 'simplexcub[plot]'"]
    assert not path.exists()
    monkeypatch.setattr("simplexcub.picture.notebook.available", lambda: False)
    assert "<img" not in html(HS[3])


def test_kinds() -> None:
    assert [kind_of(f"x.{kind.upper()}") for kind in ENDINGS] == list(ENDINGS)
    with pytest.raises(InputError, match="kind must be one of svg, png, pdf; got gif"):
        encode(HS[2], "gif")


# Notebooks


def test_a_notebook_shows_table_verification_and_picture() -> None:
    text = HS[3]._repr_html_()
    assert text == html(HS[3])
    assert text.startswith("<div><p><strong>Hilbert–Schmidt eigenvalue measure, N = 3, degree 5, 9 nodes</strong></p>")
    assert 'src="data:image/png;base64,' in text
    assert "21 moments; largest error" in text
    assert "Rounded to 8 of 50 digits." in text
    assert len(text) < 200_000
    assert repr(HS[3]) == "<Rule hilbert-schmidt(N=3, K=3), all, degree 5, 9 nodes, 50 digits>"


def test_a_long_rule_is_cut_and_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("simplexcub.picture.notebook.available", lambda: False)
    text = html(load(hilbert_schmidt(3), degree=9))
    assert text.count("<td>") == 6 * 5
    assert "14 more rows" in text


def test_what_others_wrote_is_escaped_in_notebooks_and_pictures() -> None:
    odd = Provenance("<script>alert(1)</script>", 0, "undated", "<b>$x_{$</b>")
    proof = {"method": "<img src=x onerror=alert(1)>", "radius": "1e-9", "holds": True}
    found = replace(HS[3].verification, proof=proof)
    rule = replace(HS[3], provenance=odd, verification=found, symmetry="<i>")
    text = rule._repr_html_()
    assert "<script" not in text
    assert "onerror=alert(1)>" not in text
    assert "&lt;img src=x onerror=alert(1)&gt;" in text
    assert re.findall(r"<(?!/?(?:div|p|strong|img|table|tr|th|td)\b)", text) == []


def test_unverified_and_foreign_rules_have_a_notebook_form(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("simplexcub.picture.notebook.available", lambda: False)
    assert "NOT VERIFIED: it has not been checked" in html(two_spectra())
    wide = replace(two_spectra(), orbits=(Orbit((1, 2), ("1", "0"), "0.4"),))
    assert html(wide).startswith("<div>")


def test_a_rule_without_the_lent_renderer_falls_back_to_its_plain_form(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("simplexcub.hooks.html", None)
    assert HS[3]._repr_html_() is None


def test_importing_the_package_loads_neither_numpy_nor_matplotlib() -> None:
    program = "import sys, simplexcub; assert not {'numpy', 'matplotlib'} & set(sys.modules)"
    subprocess.run([sys.executable, "-c", program], env=package_environment(), check=True, timeout=60)
