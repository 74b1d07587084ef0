"""A worker of the tests, `python -m tests.faults.work SLOTS`: as `discwright work`, with the planner of the tests."""

import logging
import os
import sys

from service.background.worker import Worker, work_until_told
from service.parts import open_parts
from service.settings import settings_from
from service.working import chores_of


def main() -> int:
    """Work until told to stop."""
    logging.basicConfig(level=logging.INFO, stream=sys.stderr, format="%(process)d %(levelname)s %(message)s")
    logging.getLogger("alembic").setLevel(logging.WARNING)
    parts = open_parts(settings_from(os.environ))
    worker = Worker(parts, slots=int(sys.argv[1]), chores=chores_of(parts), planner="tests.faults.planner")
    return 0 if work_until_told(worker) else 1


if __name__ == "__main__":
    sys.exit(main())
