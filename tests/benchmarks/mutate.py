"""One changed digit in every shipped table: does the verifier notice? And how long do all proofs take?

A digit of a node's coordinate or of a weight, anywhere above the last two, is replaced by another; the bare numbers
keep their claim. Run with ``python tests/benchmarks/mutate.py [MUTATIONS PER TABLE]``.
"""

from __future__ import annotations

import random
import sys
import time
from dataclasses import replace
from pathlib import Path

from simplexcub.rule import Rule
from simplexcub.table import read
from simplexcub.verify import prove, verify

TABLES = Path(__file__).parent.parent.parent / "tables"


def mutate(text: str, rng: random.Random) -> str:
    """`text` with one digit above the last two significant ones changed."""
    first = next(k for k, c in enumerate(text) if c in "123456789")
    places = [k for k in range(first, len(text) - 2) if text[k] != "."]
    place = rng.choice(places)
    digit = rng.choice([d for d in "0123456789" if d != text[place]])
    return text[:place] + digit + text[place + 1 :]


def mutant(rule: Rule, rng: random.Random) -> Rule:
    """`rule` with one digit changed, its orbits put aside so that only the numbers speak."""
    nodes = [list(node) for node in rule.node_decimals]
    weights = list(rule.weight_decimals)
    cells = [(nodes[k], i) for k in range(len(nodes)) for i in range(rule.measure.N)]
    cells += [(weights, k) for k in range(len(weights))]
    row, position = rng.choice([(r, i) for r, i in cells if len(r[i]) > 10 and r[i].strip("0.")])
    row[position] = mutate(row[position], rng)
    return replace(rule, node_decimals=tuple(map(tuple, nodes)), weight_decimals=tuple(weights), orbits=())


def main() -> None:
    """Print the figures."""
    times = int(sys.argv[1]) if len(sys.argv) > 1 else 5
    rng = random.Random(0)
    paths = sorted(TABLES.glob("*/*/*.json"))
    rules = [read(path) for path in paths]
    start = time.perf_counter()
    proofs = [prove(rule) for rule in rules]
    seconds = time.perf_counter() - start
    print(f"proofs    {sum(p.holds for p in proofs)} of {len(rules)} tables in {seconds:.1f} s")
    print(f"radius    largest {max((p.radius for p in proofs), key=float)}")
    caught = missed = resisted = 0
    start = time.perf_counter()
    for path, rule in zip(paths, rules, strict=True):
        for _ in range(times):
            changed = mutant(rule, rng)
            if verify(changed).holds:
                missed += 1
                print(f"missed    {path.relative_to(TABLES)}")
            else:
                caught += 1
            bare = replace(changed, symmetry="none")
            # The proof is the dearer of the two, and only needed where the residuals do not tell.
            resisted += not (verify(bare).holds and verify(bare, prove=True).holds)
    seconds = time.perf_counter() - start
    print(f"mutations {caught} of {caught + missed} refused by verify alone, in {seconds:.1f} s")
    print(f"no claim  {resisted} of {caught + missed} refused with the claim of symmetry put aside, proof included")


if __name__ == "__main__":
    main()
