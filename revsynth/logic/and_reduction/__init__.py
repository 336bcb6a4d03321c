"""Fewest ANDs: what a network costs as a circuit, since XORs are nearly free."""

from revsynth.logic.and_reduction.loop import fewest_ands

__all__ = ["fewest_ands"]
