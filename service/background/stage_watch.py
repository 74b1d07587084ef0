"""How long the stages of planning one order take: watched from outside, so that no stage knows of a clock."""

import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import Any

from layout.documents import Cutter, Movement, Settings
from service.planner import AnyPlanner, CheckedDrawing, Clock
from service.store.holds import FileKeeper


class StageWatch:
    """Adds up the seconds of each stage."""

    def __init__(self) -> None:
        """Begin with none."""
        self.took_s: dict[str, float] = {}

    @contextmanager
    def timing(self, stage: str) -> Iterator[None]:
        """Add what is done inside to a stage; nothing where it fails."""
        begun_s = time.perf_counter()
        yield
        self.took_s[stage] = self.took_s.get(stage, 0.0) + time.perf_counter() - begun_s


class TimedPlanner:
    """A planner that is watched: `laying-out` is from the tune to checked discs, `files` from these to their bytes."""

    def __init__(self, planner: AnyPlanner, watch: StageWatch) -> None:
        self._planner = planner
        self._watch = watch

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[Any, ...]:
        """As the planner does."""
        with self._watch.timing("laying-out"):
            return self._planner.lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)

    def fingerprint_of(
        self, tune: bytes, movement: Movement, cutter: Cutter, settings: Settings, number: int = 1
    ) -> str:
        """As the planner does."""
        return self._planner.fingerprint_of(tune, movement, cutter, settings, number)

    def files_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does."""
        with self._watch.timing("files"):
            return self._planner.files_of(laid_out, not_good=not_good)

    def told_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        """As the planner does."""
        with self._watch.timing("files"):
            return self._planner.told_of(laid_out, not_good=not_good)

    def check_drawing(self, dxf: bytes, movement: Movement, cutter: Cutter) -> CheckedDrawing:
        """As the planner does."""
        return self._planner.check_drawing(dxf, movement, cutter)


class TimedKeeper(FileKeeper):
    """A keeper that is watched: `keeping` is until the files are in the store."""

    def __init__(self, keeper: FileKeeper, watch: StageWatch) -> None:
        self._keeper = keeper
        self._watch = watch

    def keep(self, contents: Sequence[bytes]) -> list[str]:
        """As the keeper does."""
        with self._watch.timing("keeping"):
            return self._keeper.keep(contents)

    def read(self, digest: str) -> bytes:
        """As the keeper does."""
        return self._keeper.read(digest)
