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
from conftest import package_environment
from matplotlib.collections import PathCollection
from matplotlib.figure import Figure
from matplotlib.image import imread
from matplotlib.transforms import IdentityTransform
from test_table import RULES, with_negative_weight

from simplexcub.measures import (
    bures,
    flat,
    hilbert_schmidt,
    ordered,
)
from simplexcub.picture import draw, encode, line, profile, style, tetrahedron, triangle
from simplexcub.picture.orbits import (
    chamber_coordinates,
    node_orbits,
    pattern_word,
    sorted_profiles,
)
from simplexcub.picture.tetrahedron import hidden, projected
from simplexcub.rule import Rule
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


def test_stems_hang_as_low_as_their_weights() -> None:
    rule = HS[2]
    below = painted(line, rule).axes[1]
    stems = {float(s.get_xdata()[0]): float(s.get_ydata()[1]) for s in below.lines if len(set(s.get_xdata())) == 1}
    assert stems == {float(x): float(w) for x, w in zip(rule.nodes[:, 0], rule.weights, strict=True)}
    assert below.yaxis_inverted()


# N = 4 and beyond


def test_the_note_of_the_tetrahedron_says_what_is_faint() -> None:
    assert "fainter: farther away\nareas are proportional to weights" in {
        text.get_text() for text in painted(tetrahedron, HS[4]).texts
    }
    assert not any("fainter" in text.get_text() for text in painted(triangle, HS[3]).texts)


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
