"""Scratch planning: which line holds which part of a network, and when."""
