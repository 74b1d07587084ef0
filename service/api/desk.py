"""The desk where layouts are asked for: computed once, then kept for their links."""

import logging

from service.api.layout_cache import KeptLayout, LayoutCache
from service.documents import Inputs
from service.planner import AnyPlanner, Layout

log = logging.getLogger("discwright")


class LayoutDesk:
    """Gives layouts, from the cache where it can."""

    def __init__(self, planner: AnyPlanner, cache: LayoutCache) -> None:
        self._planner = planner
        self._cache = cache
        self._latest: Layout | None = None  # to mark the files of a layout just made without making it again

    @property
    def program(self) -> str:
        """Names the program that makes the bytes: part of every entity tag."""
        return self._cache.program

    def lay_out(self, inputs: Inputs) -> KeptLayout:
        """The layout of these inputs, kept from now on.

        Raises:
            LayoutError: The tune or a document cannot be used.
        """
        read = inputs.read()
        fingerprint = self._planner.fingerprint_of(inputs.tune, read.movement, read.cutter, read.settings)
        kept = self._cache.get(fingerprint)
        if kept is not None and kept.inputs == inputs:
            return kept
        laid_out = self._compute(inputs)
        kept = KeptLayout(
            fingerprint=fingerprint,
            title=laid_out.title,
            good_to_cut=laid_out.good_to_cut,
            inputs=inputs,
            files=self._planner.files_of(laid_out),
        )
        self._cache.put(kept)
        log.info("laid out %s", fingerprint)
        return kept

    def find(self, fingerprint: str) -> KeptLayout | None:
        """The layout kept under a fingerprint, or None."""
        return self._cache.get(fingerprint)

    def marked_files(self, kept: KeptLayout, reason: str) -> dict[str, bytes]:
        """All files of a layout that is not good to cut, marked so and with the reason why they are given."""
        latest = self._latest
        if latest is None or latest.fingerprint != kept.fingerprint:
            latest = self._compute(kept.inputs)
        return self._planner.files_of(latest, not_good=reason)

    def _compute(self, inputs: Inputs) -> Layout:
        read = inputs.read()
        laid_out: Layout = self._planner.lay_out(inputs.tune, read.movement, read.cutter, read.settings)
        self._latest = laid_out
        return laid_out
