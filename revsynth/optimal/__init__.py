"""Optimal circuits of few lines: complete tables up to three lines, meeting in the middle for four.

Reading list: Shende, Prasad, Markov, Hayes, "Synthesis of reversible logic circuits", IEEE TCAD 22(6), 2003
(three lines); Golubitsky, Maslov, "A study of optimal 4-bit reversible Toffoli circuits and their synthesis",
IEEE Trans. Computers 61(9), 2012 (four lines: classes under relabelling and inversion, packed words).
"""
