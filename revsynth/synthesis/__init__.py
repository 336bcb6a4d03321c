"""Synthesis: one method a file, all listed in `methods`."""
