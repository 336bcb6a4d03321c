"""Which methods `auto` asks: no permutation of more lines where a network is at hand and nothing is short."""

from __future__ import annotations

from typing import Any

import pytest

import revsynth


def asked(**options: Any) -> bool:
    """Whether `transform` was asked."""
    spec = revsynth.predicate("a + b == 5", inputs={"a": 3, "b": 3})
    tried = revsynth.build(spec, **options).to_json()["tried"]
    (told,) = {"not asked" in one.get("failed", "") for one in tried if one["method"] == "transform"}
    return not told


def test_a_network_at_hand_is_enough_for_fewest_t() -> None:
    assert not asked()
    assert not asked(uncompute="measured", oracle="bit")


@pytest.mark.parametrize(
    "options", [{"effort": "high"}, {"aim": "qubits"}, {"qubits": 12}, {"method": "transform"}]
)
def test_otherwise_every_method_is_asked(options: dict[str, Any]) -> None:
    assert asked(**options)
