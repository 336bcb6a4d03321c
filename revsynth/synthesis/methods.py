"""The synthesis methods. A new one is one new module and one line in `METHODS`."""

from __future__ import annotations

from revsynth.synthesis.decompose import DECOMPOSE
from revsynth.synthesis.interface import Method
from revsynth.synthesis.linear import LINEAR
from revsynth.synthesis.network import NETWORK
from revsynth.synthesis.optimal import OPTIMAL
from revsynth.synthesis.products import PRODUCTS
from revsynth.synthesis.transform import TRANSFORM

METHODS: tuple[Method, ...] = (LINEAR, OPTIMAL, NETWORK, PRODUCTS, DECOMPOSE, TRANSFORM)
"""Tried in this order; `auto` keeps the cheapest result for the aim."""

WIDE: tuple[Method, ...] = (NETWORK,)
"""Those that need no truth table."""
