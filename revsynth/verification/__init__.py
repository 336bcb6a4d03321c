"""Verification: from a spec and a circuit alone, with nothing of how the circuit came about."""

from revsynth.verification.evidence import Counterexample, Evidence, Verdict
from revsynth.verification.verify import verify_program

__all__ = ["Counterexample", "Evidence", "Verdict", "verify_program"]
