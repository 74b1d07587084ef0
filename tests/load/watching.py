"""What a service takes of the machine: memory, time of the processors, and what its processes hold open.

Read from /proc (proc(5)), of the first process and of all below it.
"""

import os
from collections import Counter
from dataclasses import dataclass
from pathlib import Path

from tests.faults.fleet import children_of

KIB = 1024
TICKS_PER_S = os.sysconf("SC_CLK_TCK")


@dataclass(frozen=True, slots=True, kw_only=True)
class Held:
    """What all processes of a service hold at a moment.

    Attributes:
        pids: The processes.
        threads: How many.
        handles: Open files of any kind.
        sockets: Those of them that are sockets.
        connections: Those that are open databases; each connection opens its file once.
    """

    pids: frozenset[int]
    threads: int
    handles: int
    sockets: int
    connections: int


def processes_of(pid: int) -> list[int]:
    """A process and all below it."""
    return [pid, *(below for child in children_of(pid) for below in processes_of(child))]


def memory_bytes(pids: list[int]) -> int:
    """What processes take together, shared pages counted once (Pss)."""
    return sum(_pss_bytes(pid) for pid in pids)


def _pss_bytes(pid: int) -> int:
    try:
        for line in Path(f"/proc/{pid}/smaps_rollup").read_text().splitlines():
            if line.startswith("Pss:"):
                return int(line.split()[1]) * KIB
    except OSError:
        pass  # it has ended
    return 0


def processor_s(pids: list[int]) -> float:
    """Time of the processors that processes have taken, without what ended below them."""
    return sum(_ticks(pid) for pid in pids) / TICKS_PER_S


def _ticks(pid: int) -> int:
    try:
        fields = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
    except OSError:
        return 0
    return int(fields[11]) + int(fields[12])  # utime and stime, fields 14 and 15 of the line


def machine_busy_s() -> float:
    """Time that all processors of the machine were not idle, whoever used them."""
    user, nice, system, _idle, _waits, irq, softirq, steal, *_ = map(
        int, Path("/proc/stat").read_text().splitlines()[0].split()[1:]
    )
    return (user + nice + system + irq + softirq + steal) / TICKS_PER_S


def held(pid: int) -> Held:
    """What a service holds now."""
    pids = processes_of(pid)
    opened = [target for one in pids for target in _handles(one)]
    kinds = Counter("socket" if target.startswith("socket:") else target for target in opened)
    return Held(
        pids=frozenset(pids),
        threads=sum(len(list(Path(f"/proc/{one}/task").iterdir())) for one in pids),
        handles=len(opened),
        sockets=kinds["socket"],
        connections=sum(count for target, count in kinds.items() if target.endswith(".sqlite")),
    )


def _handles(pid: int) -> list[str]:
    targets = []
    for link in Path(f"/proc/{pid}/fd").iterdir():
        try:
            targets.append(str(link.readlink()))
        except OSError:
            continue  # closed meanwhile
    return targets
