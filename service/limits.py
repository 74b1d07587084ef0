"""Every limit a user can run into, each with its unit and its reason: one table for the command and the service."""

from dataclasses import dataclass

from layout.limits import Limit, limit, limits_told
from service.importing import ONE_AT_A_TIME

MIB = 1024 * 1024


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """The limits of the command and the service; /v1/limits lists them under the names of the fields."""

    upload_bytes: int = limit(
        2 * MIB, "bytes", "largest body of a request, in any form: tens of times the largest tune a disc can hold"
    )
    document_bytes: int = limit(
        2 * MIB, "bytes", "largest movement, cutter or settings document: 50,000 rulings of up to 40 bytes fit"
    )
    form_parts: int = limit(8, "parts", "most parts of a multipart body: four are known, a few more get a clear error")
    drawing_bytes: int = limit(
        10 * MIB, "bytes", "largest drawing that is checked: a disc of 20,000 projections; reading one takes a minute"
    )
    sheet_form_bytes: int = limit(
        6 * MIB, "bytes", "largest form with a sheet job and drawings: the largest job, and 4 MiB of drawings"
    )
    run_bytes: int = limit(
        64 * MIB, "bytes", "largest form that asks for a run: 10,000 tunes of usual size, packed; held in memory once"
    )
    run_list_bytes: int = limit(
        4 * MIB, "bytes", "largest list of what a run orders: 10,000 pairs with names and references take 2 MiB"
    )
    run_orders: int = limit(10_000, "orders", "most pairs of a tune and a movement in one run: a shop's whole shelf")
    run_entries: int = limit(
        20_000, "files", "most files and folders in an archive: twice its tunes, for what else lies there; 1 kB each"
    )
    run_unpacked_bytes: int = limit(
        512 * MIB, "bytes", "most that all tunes of an archive unpack to: 10,000 of 50 kB, far above usual ones"
    )
    run_orders_waiting: int = limit(
        200, "orders", "orders of runs that wait for a worker at a time, so that an order placed alone waits for few"
    )
    run_orders_at_a_time: int = limit(
        20, "orders", "pairs of a run that a worker makes orders of in one go, so that it looks round now and then"
    )
    reason_characters: int = limit(
        200, "characters", "longest despite_findings reason: it is lettered on the disc and stands in every file"
    )
    shown_problems: int = limit(
        20, "problems", "most faults of a document told in one answer, so that the answer stays readable"
    )
    shown_characters: int = limit(
        500, "characters", "longest text told about one fault, since it may repeat what was sent"
    )
    search_s: int = limit(
        60,
        "seconds",
        "longest search for one layout, whatever its settings allow; the best disc found by then is given",
    )
    after_search_s: int = limit(
        60, "seconds", "what may follow a search at least, till its discs are checked and their files made; usually one"
    )
    cache_layouts: int = limit(
        200, "layouts", "layouts kept for their links; the least recently used goes first, post the tune again then"
    )
    cache_bytes: int = limit(
        256 * MIB, "bytes", "disk taken by kept layouts; packed, a full disc of the largest movement takes under 1 MiB"
    )
    hearing_s: int = limit(
        900, "seconds", "longest sound that is made of a disc: ten turns of the largest movement; a core takes 10 s"
    )
    hearing_bytes: int = limit(
        512 * MIB, "bytes", "disk taken by kept sounds, the least recently heard goes first; a turn of 66 s takes 7 MiB"
    )
    hearing_kept_s: int = limit(
        86_400, "seconds", "how long a sound is kept that nobody hears: a day, then the next that is made removes it"
    )
    abandoned_part_s: int = limit(
        3600, "seconds", "age at which a file left half-written in the cache by a stopped worker is removed"
    )
    file_max_age_s: int = limit(
        86_400, "seconds", "how long a client may keep a file without asking: a day, as it is of the same disc"
    )
    drained_bytes: int = limit(
        16 * MIB, "bytes", "how much of a refused body is still read, so that the sender gets to read the answer"
    )

    head_s: int = limit(
        10, "seconds", "longest a request's head may take from the connection on: heads fit a packet or two"
    )
    head_bytes: int = limit(
        64 * 1024, "bytes", "longest head of a request: several times what browsers send with all their cookies"
    )
    body_s: int = limit(
        10, "seconds", "longest a request's body may take beside its bytes at body_bytes_per_s; then the answer is 408"
    )
    body_bytes_per_s: int = limit(
        16 * 1024, "bytes/s", "slowest sender that is waited for, on the average: a poor mobile line has twice as much"
    )
    gathered_bytes: int = limit(
        256 * 1024, "bytes", "longest body that holds no thread while it comes; nearly every tune is shorter"
    )
    taker_s: int = limit(
        30, "seconds", "longest that a client may take none of an answer: as much as a broken line takes to come back"
    )
    linger_s: int = limit(
        2, "seconds", "how long a connection stays open after its answer, so that the client gets to read it"
    )
    connections: int = limit(
        500, "connections", "most connections of one web process; a process may open 1,024 files on a usual system"
    )
    connections_per_address: int = limit(
        100, "connections", "most of them of one address whose requests are not whole; the oldest is let go for a new"
    )

    waiting_requests: int = limit(
        64, "requests", "of one web process that wait for a thread; more are refused, as they would wait for seconds"
    )

    def told(self) -> tuple[Limit, ...]:
        """Every limit: of reading a tune, of sheet jobs, these, and of hooks, in the order of the fields."""
        # The computation takes a second to import, and is needed here only for what it limits itself.
        with ONE_AT_A_TIME:
            from layout.sheet_walk import LIMITS_OF_SHEETS  # noqa: PLC0415
            from layout.walk import LIMITS_OF_READING  # noqa: PLC0415

        return LIMITS_OF_READING + LIMITS_OF_SHEETS + limits_told(self) + limits_told(HOOK_LIMITS, prefix="hook_")


@dataclass(frozen=True, slots=True, kw_only=True)
class HookLimits:
    """The limits of hooks; /v1/limits lists them under the names of the fields, with hook_ before.

    "The specification" is Standard Webhooks 1.0.0.
    """

    url_characters: int = limit(2000, "characters", "longest URL of a hook: what every browser and server takes")
    per_owner: int = limit(
        50, "hooks", "most hooks of an owner, those for tests apart: every event of an order is written for each"
    )
    body_bytes: int = limit(
        20_000, "bytes", "a message stays below it: the specification's 20 kB, section Payload size"
    )
    lookup_s: int = limit(
        5,
        "seconds",
        "longest that a host's name is looked up: after it resolvers ask the next server (resolv.conf)",
    )
    connect_s: int = limit(
        5, "seconds", "longest wait for the host to pick up; one that has not by then will hardly take a message"
    )
    addresses: int = limit(
        3, "addresses", "of a host, tried one after another where nobody picks up, all within the time of one try"
    )
    answer_bytes: int = limit(4096, "bytes", "read of an answer's body; it decides nothing, so the rest is left")
    jitter_percent: int = limit(
        10, "%", "of a wait, added to it by chance, so that what failed together does not come back together"
    )
    retry_after_s: int = limit(
        86_400, "seconds", "longest wait that a hook may ask for by Retry-After: the longest the specification has"
    )
    quiet_s: int = limit(
        30, "seconds", "how long a hook that is overrun gets nothing, where it names no time itself: common practice"
    )
    lease_beyond_s: int = limit(
        60, "seconds", "beyond the time of a try that a message is one process's: to look up the name, and to write"
    )
    tolerance_s: int = limit(
        300, "seconds", "how far a message's time may be from its receiver's: five minutes are common practice"
    )
    secrets_before: int = limit(
        4, "secrets", "rotated secrets that still sign; more would only lengthen the header field"
    )
    look_every_s: int = limit(1, "seconds", "how often is looked for messages, and so how late one may be")
    at_a_time: int = limit(32, "messages", "that one process sends at a time: each waits for others most of its time")
    per_hook_at_a_time: int = limit(4, "messages", "of them to one hook, so that others are told too")
    per_late_hook_at_a_time: int = limit(
        1, "messages", "of them to one that did not take its last message: it may hang, and shall hold nobody up"
    )
    hooks_per_look: int = limit(
        200, "hooks", "with something due that one look finds; there are few more, and the next look follows at once"
    )
    stop_percent: int = limit(
        50, "%", "of the time to stop, for messages on their way; after it the lease lets another process send them"
    )


HOOK_LIMITS = HookLimits()
