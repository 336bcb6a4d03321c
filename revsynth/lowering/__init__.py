"""Lowering: a cascade written in X, CX, Toffoli or Clifford+T gates, with the scratch that pays."""

from revsynth.lowering.block_circuit import lower

__all__ = ["lower"]
