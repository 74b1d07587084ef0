"""How hypothesis runs here: no test fails for being slow on a busy machine."""

from hypothesis import settings

settings.register_profile("untimed", deadline=None)
settings.load_profile("untimed")
