"""Generated examples: the same ones on every run, and no deadline, since machines are shared."""

from hypothesis import settings

settings.register_profile("steam", deadline=None, derandomize=True, database=None)
settings.load_profile("steam")
