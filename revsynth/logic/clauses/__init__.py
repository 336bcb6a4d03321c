"""Conjunctions of clauses as networks: flat, factored by selection, and by the gates that they encode.

A literal of a clause is a signed variable number from 1 on, as in DIMACS; variable i is input bit i - 1.
"""
