"""Lifting: what a wide circuit does, as one exact AND-XOR graph, found gate by gate."""

from revsynth.verification.lifting.account import Account, Claim, account, start_of
from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.lift import lift
from revsynth.verification.lifting.model import Lifted, NotClosedError, Value

__all__ = [
    "Account",
    "Claim",
    "Graph",
    "Lifted",
    "NotClosedError",
    "Value",
    "account",
    "lift",
    "start_of",
]
