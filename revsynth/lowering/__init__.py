"""Lowering: a cascade written in X, CX, Toffoli or Clifford+T gates, with the scratch that pays."""

from revsynth.lowering.lower import lower

__all__ = ["lower"]
