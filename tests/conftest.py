"""How hypothesis draws: no deadline on a shared machine, few examples, the same ones on every run in CI."""

import os

from hypothesis import settings

settings.register_profile("local", deadline=None, max_examples=25)
settings.register_profile("ci", deadline=None, max_examples=25, derandomize=True, print_blob=True)
settings.load_profile("ci" if os.environ.get("CI") or os.environ.get("BROWSER_TESTS") == "require" else "local")
