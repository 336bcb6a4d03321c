"""The Young-subgroup decomposition: a permutation as two single-target gates a line.

Source: A. De Vos, Y. Van Rentergem, "Young subgroups for reversible computers", Advances in Mathematics of
Communications 2(2), 2008; Y. Van Rentergem, A. De Vos, L. Storme, J. Physics A 38, 2005 (from memory).
"""
