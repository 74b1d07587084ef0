"""What is imported when: nothing heavy before it is used, and the computation whole by whoever asks first."""

import subprocess
import sys

# What takes long to import, and whose only use is in a part of the computation or a setting that may not be asked for.
NOT_FOR_THE_WEB = frozenset({"reportlab", "ezdxf", "scipy", "fontTools", "alembic", "botocore", "s3fs"})
HEAVY = NOT_FOR_THE_WEB | {"mido", "highspy", "numpy", "shapely", "pydantic", "sqlalchemy", "flask", "jinja2", "orjson"}

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


def imported_after(statement: str) -> set[str]:
    """The names of all modules in a new process after a statement."""
    asked = [sys.executable, "-c", f"{statement}; import sys; print(*sys.modules)"]
    return set(subprocess.run(asked, check=True, capture_output=True, text=True).stdout.split())


def test_importing_layout_imports_nothing_that_takes_long() -> None:
    assert HEAVY & imported_after("import layout") == set()


def test_the_web_is_imported_without_what_only_planning_needs() -> None:
    assert NOT_FOR_THE_WEB & imported_after("import service.app") == set()
