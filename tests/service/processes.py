"""Processes as tests look at them."""

from pathlib import Path


def is_alive(pid: int) -> bool:
    """Whether there is such a process, and it has not ended."""
    try:
        state = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0]
    except (FileNotFoundError, ProcessLookupError):
        return False
    return state != "Z"
