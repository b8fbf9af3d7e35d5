"""A numpy archive: float64 arrays to compute with, and every digit as text beside them; nothing in it is pickled."""

from __future__ import annotations

import io
import json
from typing import Any

import numpy as np

from simplexcub.rule import Rule
from simplexcub.table.describe import facts


def export(rule: Rule) -> bytes:
    """The rule as the bytes of an ``.npz`` file.

    It holds ``nodes`` (M, N) and ``weights`` (M,) in double precision, ``node_decimals`` and ``weight_decimals`` as
    text with all digits, ``measure`` as JSON text, ``degree``, and ``description``, rows of label and text. Embedded
    weights are there as ``embedded_weights``, with their decimals and degree.
    """
    archive = io.BytesIO()
    second: dict[str, Any] = {}
    if rule.embedded is not None:
        second = {
            "embedded_weights": rule.embedded_weights,
            "embedded_weight_decimals": np.array(rule.embedded.weight_decimals, dtype=np.str_),
            "embedded_degree": np.array(rule.embedded.degree),
        }
    np.savez(
        archive,
        **second,
        nodes=rule.nodes,
        weights=rule.weights,
        node_decimals=np.array(rule.node_decimals, dtype=np.str_),
        weight_decimals=np.array(rule.weight_decimals, dtype=np.str_),
        measure=np.array(json.dumps(rule.measure.parameters()), dtype=np.str_),
        degree=np.array(rule.degree),
        description=np.array([(fact.label, fact.text) for fact in facts(rule)], dtype=np.str_),
    )
    return archive.getvalue()
