"""The long try of the API from outside: many requests of every operation, and every border value.

`python tests/faults/long_from_outside.py [SEED]` prints what schemathesis found, and ends with 1 where that is
anything.
"""

import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.service.api.outside import failures_in, try_from_outside
from tests.service.api.running import running

EXAMPLES = "100"
# DELETE /v1/keys/me is DELETE /v1/keys/{key_id} for an id that is none: 404, where border values want 405. The short
# try looks at this address.
LEFT_OUT = ("--exclude-path", "/v1/keys/me")
WITHIN_S = 3600.0


def main(seed: int) -> int:
    """Try with a key and without; gives the exit code."""
    found = 0
    for with_key in (True, False):
        begun_s = time.monotonic()
        with tempfile.TemporaryDirectory() as folder, running(Path(folder), with_worker=True) as service:
            asked = (
                "--phases",
                "coverage,fuzzing,stateful",
                "--max-examples",
                EXAMPLES,
                "--seed",
                str(seed),
                *LEFT_OUT,
            )
            told = try_from_outside(service, *asked, with_key=with_key, within_s=WITHIN_S)
            failed = failures_in(service)
        found += bool(told) + bool(failed)
        how = "with a key" if with_key else "without a key"
        sys.stdout.write(
            f"{how}: {time.monotonic() - begun_s:.0f} s, {'something' if told or failed else 'nothing'} found\n"
        )
        sys.stdout.write("\n".join([told, *failed]))
    return 1 if found else 0


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 1))
