"""How many examples hypothesis draws: two dozen by default, ten times that at night.

HYPOTHESIS_PROFILE names a profile; without it "ci" is taken where CI is set, else "dev".
"""

from __future__ import annotations

import os

from hypothesis import HealthCheck, Phase, settings

_ANY_SPEED = [HealthCheck.too_slow, HealthCheck.data_too_large, HealthCheck.filter_too_much]
_PHASES = (Phase.explicit, Phase.reuse, Phase.generate, Phase.shrink)

settings.register_profile(
    "dev",
    max_examples=24,
    derandomize=True,
    deadline=None,
    suppress_health_check=_ANY_SPEED,
    phases=_PHASES,
)
settings.register_profile("ci", settings.get_profile("dev"), print_blob=True)
settings.register_profile(
    "nightly",
    settings.get_profile("dev"),
    max_examples=240,
    derandomize=False,
    print_blob=True,
)
settings.load_profile(
    os.environ.get("HYPOTHESIS_PROFILE") or ("ci" if os.environ.get("CI") else "dev")
)
