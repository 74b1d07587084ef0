"""Whether the long tests are asked for: TESTS=thorough in the environment.

What is tried by default is a small part of the same; each place says which.
"""

import os

THOROUGH = os.environ.get("TESTS") == "thorough"
