"""Proofs about wide circuits: what was lifted from the file against the spec's own translation."""
