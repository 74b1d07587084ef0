"""The desk where layouts are asked for: computed once, then kept for their links."""

import logging
import time
from collections.abc import Callable

from service.api.layout_cache import KeptLayout, LayoutCache
from service.documents import Inputs
from service.limits import Limits
from service.planner import AnyPlanner, Layout

log = logging.getLogger("discwright")


class LayoutDesk:
    """Gives layouts, from the cache where it can."""

    def __init__(
        self,
        planner: AnyPlanner,
        cache: LayoutCache,
        limits: Limits | None = None,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        """Open the desk.

        Args:
            planner: Computes layouts.
            cache: Keeps them.
            limits: Read for the longest search.
            clock: Seconds, only ever forward.
        """
        self._planner = planner
        self._most_s = (limits or Limits()).search_s
        self._clock = clock
        self._cache = cache
        self._latest: tuple[Layout, ...] = ()  # to mark the files of layouts just made without making them again

    @property
    def program(self) -> str:
        """Names the program that makes the bytes: part of every entity tag."""
        return self._cache.program

    def lay_out_discs(self, inputs: Inputs, owner_id: str | None = None) -> tuple[KeptLayout, ...]:
        """The layouts of these inputs, one for each disc, in order, kept from now on.

        Those whose search the service stopped before the settings would have are not kept: they need not be
        the best, and a search on a less busy machine may find better.

        Args:
            inputs: What they are made from.
            owner_id: For whom they are kept; None for nobody in particular.

        Raises:
            LayoutError: The tune or a document cannot be used.
        """
        read = inputs.read()
        documents = (read.movement, read.cutter, read.settings)
        fingerprints = [
            self._planner.fingerprint_of(inputs.tune, *documents, number)
            for number in range(1, read.settings.discs + 1)
        ]
        found = [self._cache.get(fingerprint, owner_id) for fingerprint in fingerprints]
        kept = tuple(layout for layout in found if layout is not None and layout.inputs == inputs)
        if len(kept) == len(fingerprints):
            return kept
        computed = self._compute(inputs)
        kept = tuple(self._kept(laid_out, inputs, owner_id) for laid_out in computed)
        if self._cut_short(inputs, computed):
            log.info("stopped after %d s and not kept: %s", self._most_s, kept[0].fingerprint)
            return kept
        for layout in kept:
            self._cache.put(layout)
            log.info("laid out %s", layout.fingerprint)
        return kept

    def find(self, fingerprint: str, owner_id: str | None = None) -> KeptLayout | None:
        """The layout kept under a fingerprint for an owner, else for nobody in particular, or None."""
        own = None if owner_id is None else self._cache.get(fingerprint, owner_id)
        return own or self._cache.get(fingerprint)

    def marked_files(self, kept: KeptLayout, reason: str) -> dict[str, bytes]:
        """All files of a layout that is not good to cut, marked so and with the reason why they are given."""
        latest = {layout.fingerprint: layout for layout in self._latest}
        if kept.fingerprint not in latest:
            latest = {layout.fingerprint: layout for layout in self._compute(kept.inputs)}
        return self._planner.files_of(latest[kept.fingerprint], not_good=reason)

    def _kept(self, laid_out: Layout, inputs: Inputs, owner_id: str | None) -> KeptLayout:
        return KeptLayout(
            fingerprint=laid_out.fingerprint,
            title=laid_out.title,
            disc_number=laid_out.disc_number,
            disc_count=laid_out.disc_count,
            good_to_cut=laid_out.good_to_cut,
            inputs=inputs,
            files=self._planner.files_of(laid_out),
            owner_id=owner_id,
        )

    def _compute(self, inputs: Inputs) -> tuple[Layout, ...]:
        read = inputs.read()
        documents = (read.movement, read.cutter, read.settings)
        computed: tuple[Layout, ...] = self._planner.lay_out_discs(
            inputs.tune, *documents, self._clock, most_s=self._most_s
        )
        self._latest = computed  # what threads beside this one compute may stand there next
        return computed

    def _cut_short(self, inputs: Inputs, computed: tuple[Layout, ...]) -> bool:
        """Whether the service's limit, and not the settings', has stopped the search for these layouts."""
        asked_s = inputs.read().settings.time_limit_s
        by_service = asked_s is None or asked_s > self._most_s
        return by_service and any(layout.stopped == "time" for layout in computed)
