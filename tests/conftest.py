"""Settings of the whole suite: hypothesis profiles, one place."""

from __future__ import annotations

import os

from hypothesis import HealthCheck, settings

settings.register_profile(
    "quick", deadline=None, max_examples=50, suppress_health_check=[HealthCheck.too_slow]
)
settings.register_profile("ci", parent=settings.get_profile("quick"), max_examples=100, derandomize=True)
settings.register_profile("deep", parent=settings.get_profile("quick"), max_examples=2000)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "quick"))
