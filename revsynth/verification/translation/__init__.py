"""The spec said a second time in gates, for proofs: nothing here is shared with how circuits are built."""

from revsynth.verification.translation.spec_gates import Translation, translate

__all__ = ["Translation", "translate"]
