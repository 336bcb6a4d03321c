"""From a spec of any width to a network: every kind of spec body has its way here."""

from revsynth.elaborate.model import Check, Elaboration
from revsynth.elaborate.spec_network import elaborate

__all__ = ["Check", "Elaboration", "elaborate"]
