"""Networks with few ANDs from bare truth tables."""

from revsynth.logic.tables.table_network import MOST_INPUTS, table_network

__all__ = ["MOST_INPUTS", "table_network"]
