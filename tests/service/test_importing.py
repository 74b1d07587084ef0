"""A process whose first requests all come at once, before the computation is imported."""

import subprocess
import sys

# Several threads begin at one moment, as the first requests of a service under load do; each part of the computation
# comes to the libraries for drawings by another way.
ALL_AT_ONCE = """
import sys, threading
from service.computation import check_tune, sheet_files_of, trial_files
from service.limits import Limits

sys.setswitchinterval(1e-5)
asks = (Limits().told, lambda: check_tune(b"", None), lambda: sheet_files_of(None), lambda: trial_files(None, None)) * 2
barrier, failed = threading.Barrier(len(asks)), []

def first(ask):
    barrier.wait()
    try:
        ask()
    except ImportError as fault:
        failed.append(str(fault))
    except Exception:
        pass  # it was imported, and took what it was given for none of its own

threads = [threading.Thread(target=first, args=(ask,)) for ask in asks]
[thread.start() for thread in threads]
[thread.join() for thread in threads]
print(failed)
"""


def test_first_requests_that_come_at_once_all_find_the_computation_whole() -> None:
    told = subprocess.run([sys.executable, "-c", ALL_AT_ONCE], check=True, capture_output=True, text=True)

    assert told.stdout == "[]\n"
