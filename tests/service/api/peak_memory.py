"""A process that answers requests and tells how much memory each took: `python -m tests.service.api.peak_memory`.

Its arguments: method, path, the header Authorization, media type, and files with bodies; without one, a request without
a body. The service is the one that the environment names. For each request it prints the status, the bytes of the
answer, the MiB that answering took more than the process had before, and the seconds.
"""

import io
import os
import re
import sys
import time
from pathlib import Path
from typing import BinaryIO

from flask.testing import FlaskClient

from service.app import create_app
from service.settings import settings_from


def main() -> int:
    """Answer the requests."""
    method, path, authorization, media_type, *bodies = sys.argv[1:]
    http = create_app(settings_from(os.environ)).test_client()
    headers = {"Authorization": authorization, "Content-Type": media_type}
    assert http.get("/v1/runs", headers=headers).status_code == 200  # everything is imported
    for body in bodies or [""]:
        before_kib, begun_s = _memory_kib("VmRSS"), time.monotonic()
        Path("/proc/self/clear_refs").write_text("5")  # the peak is counted anew from here: proc(5)
        status, byte_count = _ask(http, method, path, headers, body)
        more_mib = (_memory_kib("VmHWM") - before_kib) / 1024
        sys.stdout.write(f"{status} {byte_count} {more_mib:.1f} {time.monotonic() - begun_s:.2f}\n")
    return 0


def _ask(http: FlaskClient, method: str, path: str, headers: dict[str, str], body: str) -> tuple[int, int]:
    stream: BinaryIO = Path(body).open("rb") if body else io.BytesIO()  # noqa: SIM115 -- closed by the next line
    with stream:
        length = Path(body).stat().st_size if body else 0
        answer = http.open(path, method=method, headers=headers, input_stream=stream, content_length=length)
        return answer.status_code, sum(len(piece) for piece in answer.iter_encoded())


def _memory_kib(field: str) -> int:
    found = re.search(rf"{field}:\s*(\d+) kB", Path("/proc/self/status").read_text())
    assert found is not None
    return int(found[1])


if __name__ == "__main__":
    sys.exit(main())
