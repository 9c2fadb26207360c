"""Settings of every test: a slow or busy machine is no failure."""

from hypothesis import settings

settings.register_profile("any machine", deadline=None)
settings.load_profile("any machine")
