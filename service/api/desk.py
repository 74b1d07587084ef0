"""The desk where layouts are asked for: computed once, then kept for their links.

What a layout tells is written at once, its files when the first of them is asked for: planning how a disc is cut and
writing its drawings takes longer than finding it, and most discs on the way to the right one are only looked at. The
files of a layout that no process has at hand are made by laying it out again, and given only where that comes to the
layout that was told, byte for byte. A search that time stopped need not, so that its files are all made at once.
"""

import json
import logging
import threading
import time
from collections.abc import Callable, Mapping
from contextlib import suppress
from dataclasses import replace
from itertools import chain

from layout.file_names import files_given
from service.api.computing_queue import ComputingQueue
from service.api.layout_cache import KeptLayout, LayoutCache
from service.api.problems import ProblemError
from service.computing.at_hand import SetsAtHand
from service.documents import Inputs
from service.limits import Limits
from service.planner import AnotherDiscError, AnyPlanner, Layout

log = logging.getLogger("discwright")

JUDGED = {"findings", "good_to_cut"}  # of layout.json: what is said of the disc, and not what it is
LOCKS = 256  # many more than a process has threads, so that hardly two wait who want different discs


class LayoutDesk:
    """Gives layouts, from the cache where it can."""

    def __init__(
        self,
        planner: AnyPlanner,
        cache: LayoutCache,
        queue: ComputingQueue,
        limits: Limits | None = None,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        """Open the desk.

        Args:
            planner: Computes layouts, each in its turn.
            cache: Keeps them.
            queue: Where who computes takes a place, before any lock that is held while one computes.
            limits: Read for the longest search.
            clock: Seconds, only ever forward.
        """
        self._planner = planner
        self._queue = queue
        self._most_s = (limits or Limits()).search_s
        self._clock = clock
        self._cache = cache
        self._at_hand: SetsAtHand[Layout] = SetsAtHand()  # so that files of what was just made are soon there
        self._making = tuple(threading.Lock() for _ in range(LOCKS))  # so that two who ask at a time make them once
        # Of discs that an earlier version kept, not searched for twice; no more than that version left in the cache.
        self._others: dict[str, ProblemError] = {}

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
        with self._queue.place():
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
        """The layout kept under a fingerprint for an owner, else for nobody in particular, or None.

        What an earlier version of the program kept is laid out again by this one, and given where the engine is the
        same, no search was stopped by time, and all that both tell of the disc is alike, findings apart.

        Raises:
            ProblemError: An earlier engine laid it out, or it need not be the same disc.
            LayoutError: An earlier version took what this one does not.
        """
        kept, is_current = self.find_any(fingerprint, owner_id)
        if kept is None or is_current:
            return kept
        read, number = kept.inputs.read(), kept.disc_number
        documents = (read.movement, read.cutter, read.settings)
        if self._planner.fingerprint_of(kept.inputs.tune, *documents, number) != fingerprint:
            raise _outdated(
                kept,
                f"{fingerprint} was laid out by an earlier version of the engine, or from a movement or a cutter that "
                "ships in another revision now; its tune, documents and settings are kept",
            )
        if kept.stopped_by_time:
            raise _outdated(
                kept,
                f"{fingerprint} was laid out by an earlier version of the program, and time stopped the search for it, "
                "so that it may come to another disc; its tune, documents and settings are kept",
            )
        return self._same_again(kept)

    def lay_out_again(self, fingerprint: str, owner_id: str | None = None) -> KeptLayout | None:
        """The layout of a fingerprint, or what this version makes of the same where an earlier one kept it; or None.

        Raises:
            ProblemError: The service stopped the search for it, so that it is not kept.
            LayoutError: An earlier version took what this one does not.
        """
        kept, is_current = self.find_any(fingerprint, owner_id)
        if kept is None or is_current:
            return kept
        with self._queue.place(), self._lock_of(kept):
            discs = self.lay_out_discs(kept.inputs, kept.owner_id)
        again = discs[kept.disc_number - 1]
        is_stopped = any(disc.stopped_by_time for disc in discs)
        if is_stopped and self._cache.get(again.fingerprint, again.owner_id) is None:
            raise self._cut_short_again(kept)
        return again

    def _same_again(self, kept: KeptLayout) -> KeptLayout:
        """What an earlier version kept, made by this one and kept from now on, if it is the same disc."""
        with self._queue.place(), self._lock_of(kept):
            made = self._cache.get(kept.fingerprint, kept.owner_id)  # whoever was before us may have made it
            if made is not None:
                return made
            if kept.fingerprint not in self._others:
                computed = self._at_hand_of(kept) or self._compute(kept.inputs)
                laid_out = computed[kept.disc_number - 1]
                if any(one.stopped == "time" for one in computed):
                    self._others[kept.fingerprint] = self._cut_short_again(kept)
                elif not _same_disc(kept.files, self._planner.told_of(laid_out)):
                    self._others[kept.fingerprint] = _outdated(
                        kept,
                        f"an earlier version of the program laid {kept.fingerprint} out, and this one comes to another "
                        "disc; its tune, documents and settings are kept",
                    )
                else:
                    again = self._kept(laid_out, kept.inputs, kept.owner_id)
                    self._cache.put(again)
                    return again
            refusal = self._others[kept.fingerprint]
            raise ProblemError(name=refusal.name, detail=refusal.detail, more=refusal.more)

    def _cut_short_again(self, kept: KeptLayout) -> ProblemError:
        return _outdated(
            kept,
            f"an earlier version of the program laid {kept.fingerprint} out, and the search for it was stopped after "
            f"{self._most_s} s now, so that it may be another disc; send its settings with a shorter time_limit_s",
        )

    def _at_hand_of(self, kept: KeptLayout) -> tuple[Layout, ...]:
        sets = (discs for discs in self._at_hand.sets if any(_names(one, kept) for one in discs))
        return next(sets, ())

    def _lock_of(self, kept: KeptLayout) -> threading.Lock:
        """One for all discs of a set, as they are computed together."""
        return self._making[hash(kept.inputs) % LOCKS]

    def find_any(self, fingerprint: str, owner_id: str | None = None) -> tuple[KeptLayout | None, bool]:
        """A layout with what it was made from, whichever version made it, and whether that was this one."""
        owners = dict.fromkeys((owner_id, None))
        for look, is_current in ((self._cache.get, True), (self._cache.earlier, False)):
            for whose in owners:
                if (kept := look(fingerprint, whose)) is not None:
                    return kept, is_current
        return None, False

    def names_given(self, kept: KeptLayout, reason: str | None) -> tuple[str, ...]:
        """The names of the files that are given, without the cutting files where they are kept back.

        Args:
            kept: The layout.
            reason: Why cutting files shall be given although an error-level finding stands, or None.
        """
        return files_given(kept.inputs.read().cutter, cutting=kept.good_to_cut or reason is not None)

    def told(self, kept: KeptLayout, reason: str | None) -> Mapping[str, bytes]:
        """layout.json and report.json, and perhaps more; marked where an error-level finding stands and with a reason.

        Raises:
            ProblemError: It cannot be made again as it was told.
        """
        if reason is None or kept.good_to_cut:
            return kept.files
        with self._queue.place():
            return self._made(kept, lambda laid_out: self._planner.told_of(laid_out, not_good=reason))

    def files(self, kept: KeptLayout, reason: str | None) -> Mapping[str, bytes]:
        """All files that are given, made where they are not kept.

        Those of a layout that is not good to cut are marked so, with the reason why they are given, and not kept.

        Raises:
            ProblemError: It cannot be made again as it was told.
            StoreFullError: The disk is full.
            OSError: The folder was taken away.
        """
        if reason is not None and not kept.good_to_cut:
            with self._queue.place():
                return self._made(kept, lambda laid_out: self._planner.files_of(laid_out, not_good=reason))
        if kept.has_all_files:
            return kept.files
        with self._queue.place(), self._lock_of(kept):
            other = self._cache.get(kept.fingerprint, kept.owner_id)  # whoever was before us may have made them
            if other is not None and other.has_all_files and other.inputs == kept.inputs:
                return other.files
            files = self._made(kept, self._planner.files_of)
            self._cache.put(replace(kept, files=files))
            return files

    def _made(self, kept: KeptLayout, make: Callable[[Layout], Mapping[str, bytes]]) -> Mapping[str, bytes]:
        """What is made of a kept layout with all that is known of it: at hand, or laid out again.

        Raises:
            ProblemError: It was laid out again, and came to another disc.
        """
        at_hand = [laid_out for laid_out in chain.from_iterable(self._at_hand.sets) if _names(laid_out, kept)]
        with suppress(AnotherDiscError):
            for laid_out in at_hand or self._compute(kept.inputs):  # another disc is not searched for twice
                told = self._planner.told_of(laid_out)
                if _names(laid_out, kept) and told["layout.json"] == kept.files["layout.json"]:
                    return make(laid_out)
        if kept.has_all_files:
            raise _outdated(
                kept,
                f"to be marked with the reason {kept.fingerprint} was laid out again and came to another disc, as a "
                "search may that time stopped; what is kept of it stays. Send its settings with a longer time_limit_s, "
                "or without one, and give the reason there",
            )
        log.warning("laid out again, it is another disc, and kept no longer: %s", kept.fingerprint)
        self._cache.let_go(kept.fingerprint, kept.owner_id)
        raise ProblemError(
            name="layout-unknown",
            detail=f"for its files {kept.fingerprint} was laid out again and came to another disc, so that it is kept "
            "no longer; post the tune again",
        )

    def _kept(self, laid_out: Layout, inputs: Inputs, owner_id: str | None) -> KeptLayout:
        may_differ = laid_out.stopped == "time"
        return KeptLayout(
            fingerprint=laid_out.fingerprint,
            title=laid_out.title,
            disc_number=laid_out.disc_number,
            disc_count=laid_out.disc_count,
            good_to_cut=laid_out.good_to_cut,
            inputs=inputs,
            files=self._planner.files_of(laid_out) if may_differ else self._planner.told_of(laid_out),
            owner_id=owner_id,
        )

    def _compute(self, inputs: Inputs) -> tuple[Layout, ...]:
        read = inputs.read()
        documents = (read.movement, read.cutter, read.settings)
        computed: tuple[Layout, ...] = self._planner.lay_out_discs(
            inputs.tune, *documents, self._clock, most_s=self._most_s
        )
        self._at_hand.add(computed[0].fingerprint, computed)
        return computed

    def _cut_short(self, inputs: Inputs, computed: tuple[Layout, ...]) -> bool:
        """Whether the service's limit, and not the settings', has stopped the search for these layouts."""
        asked_s = inputs.read().settings.time_limit_s
        by_service = asked_s is None or asked_s > self._most_s
        return by_service and any(layout.stopped == "time" for layout in computed)


def _names(laid_out: Layout, kept: KeptLayout) -> bool:
    return laid_out.fingerprint == kept.fingerprint


def _same_disc(before: Mapping[str, bytes], now: Mapping[str, bytes]) -> bool:
    """Whether two versions tell the same disc, by all that both tell; how it is judged may change."""
    old, new = (json.loads(files["layout.json"]) for files in (before, now))
    return all(old[name] == new[name] for name in (old.keys() & new.keys()) - JUDGED)


def _outdated(kept: KeptLayout, why: str) -> ProblemError:
    address = f"/v1/layouts/{kept.fingerprint}"
    more = {"again": f"{address}/again", "settings": f"{address}/settings.json"}
    return ProblemError(name="layout-outdated", detail=why, more=more)
