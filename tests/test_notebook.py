"""What a notebook shows of a rule."""

from __future__ import annotations

import re
import subprocess
import sys
from dataclasses import replace

import pytest
from conftest import package_environment
from test_picture import HS
from test_table import two_spectra

from simplexcub.measures import (
    hilbert_schmidt,
)
from simplexcub.picture.notebook import html
from simplexcub.rule import Orbit, Provenance
from simplexcub.table import load


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
