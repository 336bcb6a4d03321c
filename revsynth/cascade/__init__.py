"""The cascade: an ordered list of multi-controlled NOTs and phase gates on lines."""

from revsynth.cascade.model import PHASE, Cascade, Gate, is_negative, line_of, literal

__all__ = ["PHASE", "Cascade", "Gate", "is_negative", "line_of", "literal"]
