"""A numpy archive: float64 arrays to compute with, and every digit as text beside them; nothing in it is pickled."""

from __future__ import annotations

import io
import json

import numpy as np

from simplexcub.rule import Rule
from simplexcub.table.describe import facts


def export(rule: Rule) -> bytes:
    """The rule as the bytes of an ``.npz`` file.

    It holds ``nodes`` (M, N) and ``weights`` (M,) in double precision, ``node_decimals`` and ``weight_decimals`` as
    text with all digits, ``measure`` as JSON text, ``degree``, and ``description``, rows of label and text.
    """
    archive = io.BytesIO()
    np.savez(
        archive,
        nodes=rule.nodes,
        weights=rule.weights,
        node_decimals=np.array(rule.node_decimals, dtype=np.str_),
        weight_decimals=np.array(rule.weight_decimals, dtype=np.str_),
        measure=np.array(json.dumps(rule.measure.parameters()), dtype=np.str_),
        degree=np.array(rule.degree),
        description=np.array([(fact.label, fact.text) for fact in facts(rule)], dtype=np.str_),
    )
    return archive.getvalue()
