"""Blocks in place from a program: every step on the lines themselves, scratch clean before and after each."""

from revsynth.synthesis.in_place.blocks import in_place_blocks

__all__ = ["in_place_blocks"]
