"""How hypothesis runs here: no test fails for being slow on a busy machine."""

import logging

from hypothesis import settings

settings.register_profile("untimed", deadline=None)
settings.load_profile("untimed")

# ezdxf's remarks about damaged files quote their bytes, half letters among them, which no report can carry from
# one process to another; what the program itself says of such files is tested.
logging.getLogger("ezdxf").setLevel(logging.CRITICAL)
