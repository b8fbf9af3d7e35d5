"""The worked examples run, are right, and print what the README shows."""

from __future__ import annotations

import re
import runpy
from fractions import Fraction
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent
README = HERE.parent / "README.md"
EXAMPLES = sorted((HERE / "examples").glob("*.py"))


def output(name: str, capsys: pytest.CaptureFixture[str]) -> list[str]:
    capsys.readouterr()
    runpy.run_path(str(HERE / "examples" / f"{name}.py"), run_name="__main__")
    out, err = capsys.readouterr()
    assert err == ""
    return [line.rstrip() for line in str(out).splitlines()]


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_the_readme_shows_the_output_of_every_example(path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    fence = rf"^```text\n\$ python tests/examples/{path.name}\n(.*?)^```"
    blocks = re.findall(fence, README.read_text("utf-8"), re.M | re.S)
    assert len(blocks) == 1
    assert blocks[0].splitlines() == output(path.stem, capsys)
    assert "invented" in path.read_text("utf-8")


def test_the_table_of_the_appendix_holds_the_published_means(capsys: pytest.CaptureFixture[str]) -> None:
    """Purity (N + K)/(NK + 1) (Lubkin 1978), entropy Σ_{k=K+1}^{NK} 1/k − (N − 1)/(2K) (Page 1993)."""
    rows = output("appendix_table", capsys)[1:]
    assert len(rows) == 6
    for row in rows:
        n, k, purity, entropy = re.match(r"(\d)  (\d)  (\S+) = \S+ +(\S+) =", row).groups()  # type: ignore[union-attr]
        N, K = int(n), int(k)
        assert Fraction(purity) == Fraction(N + K, N * K + 1)
        page = sum((Fraction(1, j) for j in range(K + 1, N * K + 1)), Fraction(0)) - Fraction(N - 1, 2 * K)
        assert Fraction(entropy) == page
        assert "?" not in row
