"""How hypothesis runs here: no test fails for being slow on a busy machine."""

import logging

from hypothesis import settings

from tests.thorough import MUTANTS, tried

settings.register_profile("untimed", deadline=None, max_examples=tried(100), derandomize=MUTANTS)
settings.load_profile("untimed")

# ezdxf's remarks about damaged files quote their bytes, half letters among them, which no report can carry from
# one process to another; what the program itself says of such files is tested.
logging.getLogger("ezdxf").setLevel(logging.CRITICAL)
