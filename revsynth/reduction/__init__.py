"""Reduction: published rules that make a cascade cheaper, applied until none of them gains anything.

Reading list: Miller, Maslov, Dueck, "A transformation based algorithm for reversible logic synthesis",
DAC 2003 (deletion and moving rules); Maslov, Dueck, Miller, "Toffoli network synthesis with templates",
IEEE TCAD 24(6), 2005 (classes of templates); Song, Perkowski, IEEE TCAD 15(4), 1996 (linking of products).
"""

from revsynth.reduction.fixed_point import reduce

__all__ = ["reduce"]
