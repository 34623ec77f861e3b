"""Hypothesis profiles: a quick one for every run, a long one by HYPOTHESIS_PROFILE=long."""

import os

from hypothesis import HealthCheck, settings

_quiet = [HealthCheck.too_slow, HealthCheck.data_too_large, HealthCheck.filter_too_much]
settings.register_profile(
    "quick", max_examples=25, deadline=None, derandomize=True, suppress_health_check=_quiet
)
settings.register_profile("long", max_examples=400, deadline=None, suppress_health_check=_quiet)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "quick"))
