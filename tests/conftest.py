"""Profiles of hypothesis: the same examples every time, unless ``--hypothesis-profile roam`` asks for new ones."""

from __future__ import annotations

from hypothesis import HealthCheck, settings

settings.register_profile(
    "steady",
    derandomize=True,
    deadline=None,
    database=None,
    max_examples=40,
    suppress_health_check=[HealthCheck.too_slow],
)
settings.register_profile("roam", deadline=None, database=None, max_examples=300)
settings.load_profile("steady")
