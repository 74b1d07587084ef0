"""The kinds of errors that any request may meet, and how a kind is written."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class ProblemKind:
    """A kind of error.

    Attributes:
        name: The last part of its `type`.
        status: The HTTP status it comes with.
        title: What it is, the same each time.
        what_to_do: What its reader can do about it.
        try_again: Whether the very same request may do better later.
    """

    name: str
    status: int
    title: str
    what_to_do: str
    try_again: bool = False

    @property
    def type(self) -> str:
        """The URI reference that names this kind; a GET of it explains the kind."""
        return f"/problems/{self.name}"


KINDS = (
    ProblemKind(
        name="midi-unreadable",
        status=422,
        title="The tune is not a MIDI file that can be read",
        what_to_do="byte_offset says where reading stopped, found and expected what stood there and what was allowed. "
        "Export the tune again as a Standard MIDI File; remedy says more.",
    ),
    ProblemKind(
        name="document-invalid",
        status=422,
        title="A document is not valid",
        what_to_do="document says which one; invalid_params lists each fault with its place as a JSON pointer. "
        "Correct these places. GET /v1/movements/ID and /v1/cutters/ID show valid documents.",
    ),
    ProblemKind(
        name="rulings-contradict",
        status=422,
        title="The settings' rulings contradict each other, the tune or the comb",
        what_to_do="invalid_params lists each ruling that cannot be kept. Change or remove it.",
    ),
    ProblemKind(
        name="not-good-to-cut",
        status=422,
        title="The disc is not good to cut, so its cutting files are kept back",
        what_to_do="findings says what is wrong, where, and what helps. Change the tune or the settings. To have the "
        "files all the same, marked NOT GOOD TO CUT, add despite_findings=REASON to the request.",
    ),
    ProblemKind(
        name="movement-unknown",
        status=404,
        title="No movement has this id",
        what_to_do="known_ids lists the movements that ship; GET /v1/movements describes them. A movement of your own "
        "is posted as the part movement of a multipart body.",
    ),
    ProblemKind(
        name="cutter-unknown",
        status=404,
        title="No cutter has this id",
        what_to_do="known_ids lists the cutters that ship; GET /v1/cutters describes them. A cutter of your own is "
        "posted as the part cutter of a multipart body.",
    ),
    ProblemKind(
        name="too-much-to-compute",
        status=422,
        title="Laying this tune out takes more than the service gives to one",
        what_to_do="detail says of what. Shorten the tune, ask for a passage of it, or split it over more discs with "
        "the setting discs; the shop may give more: DISCWRIGHT_PLAN_MEMORY_MIB and DISCWRIGHT_PLAN_WITHIN_S.",
    ),
    ProblemKind(
        name="layout-unknown",
        status=404,
        title="No layout is kept under this fingerprint",
        what_to_do="Layouts are kept for a while only. Post the tune again: the same input gives the same layout.",
    ),
    ProblemKind(
        name="layout-outdated",
        status=410,
        title="This disc cannot be made again as it was laid out",
        what_to_do="detail says why. POST the document at settings to the address at again: the disc is laid out anew "
        "from the same tune and documents. Look at it before it is cut: it may be another disc.",
    ),
    ProblemKind(
        name="hearing-too-long",
        status=422,
        title="The sound would be longer than is made",
        what_to_do="most_s says how long it may be. Ask for hearing.mid, or for of=disc: as written, a tune is heard "
        "to its end, though the disc has only one turn for it. `discwright hear` has no such limit.",
    ),
    ProblemKind(
        name="route-unknown",
        status=404,
        title="There is nothing at this address",
        what_to_do="GET / lists where things are; a layout's own answer holds the links to its files.",
    ),
    ProblemKind(
        name="method-not-allowed",
        status=405,
        title="This address does not take this method",
        what_to_do="The header Allow lists the methods it takes.",
    ),
    ProblemKind(
        name="not-acceptable",
        status=406,
        title="The answer cannot be given in a form the request accepts",
        what_to_do="Ask for one of allowed_types in the header Accept, or leave the header out. Several discs come as "
        "JSON with links to the files of each, or as an archive of them all.",
    ),
    ProblemKind(
        name="request-too-slow",
        status=408,
        title="The request did not come in the time it is waited for",
        what_to_do="Send it again, over a line that carries it faster; GET /v1/limits says under head_s, body_s and "
        "body_bytes_per_s what is waited for.",
        try_again=True,
    ),
    ProblemKind(
        name="address-too-long",
        status=414,
        title="The address of the request is too long",
        what_to_do="The request line takes at most 4,094 bytes: say less in the query.",
    ),
    ProblemKind(
        name="head-too-large",
        status=431,
        title="The head of the request is too large",
        what_to_do="It may have 100 fields of 8,190 bytes each, and head_bytes of GET /v1/limits in all: send fewer or "
        "shorter ones, such as cookies.",
    ),
    ProblemKind(
        name="upload-too-large",
        status=413,
        title="The request body is too large",
        what_to_do="limit_bytes is the most that is taken. Leave out what the disc cannot play: sound, lyrics, "
        "further tracks; GET /v1/limits lists all limits.",
    ),
    ProblemKind(
        name="media-type-unsupported",
        status=415,
        title="The request body is of a media type this address does not take",
        what_to_do="Send one of allowed_types in the header Content-Type, unpacked; for a MIDI file audio/midi.",
    ),
    ProblemKind(
        name="tune-missing",
        status=400,
        title="The request brings no tune",
        what_to_do="Send the MIDI file as the body, or as the part tune of a multipart body.",
    ),
    ProblemKind(
        name="parameter-missing",
        status=400,
        title="A parameter that is needed is missing",
        what_to_do="parameter says which one; add it to the query.",
    ),
    ProblemKind(
        name="parameter-invalid",
        status=400,
        title="A parameter or a part of the body cannot be used",
        what_to_do="parameter says which one, detail why and what is allowed.",
    ),
    ProblemKind(
        name="multipart-unreadable",
        status=400,
        title="The multipart body cannot be taken apart",
        what_to_do="Send multipart/form-data as RFC 7578 says, with a boundary; curl makes it with -F tune=@FILE.",
    ),
    ProblemKind(
        name="request-malformed",
        status=400,
        title="The request is not one the service can read",
        what_to_do="Check how the request is made; detail says what is known.",
    ),
    ProblemKind(
        name="key-missing",
        status=401,
        title="The request shows no key",
        what_to_do="Add the header  Authorization: Bearer KEY. `discwright keys add` makes a key; a browser is signed "
        "in by POST /sign-in.",
    ),
    ProblemKind(
        name="key-refused",
        status=401,
        title="The key shown is not in force",
        what_to_do="Check that the whole key is sent, from dw_ to its end. A key that was revoked stays so; ask the "
        "shop for another.",
    ),
    ProblemKind(
        name="scope-missing",
        status=403,
        title="The key may not do this",
        what_to_do="scope says what the key would have to be allowed. Use a key that has it, or ask the shop for one; "
        "the scopes of a key are never changed.",
    ),
    ProblemKind(
        name="write-not-vouched",
        status=403,
        title="A browser's write does not show that it comes from the service's own pages",
        what_to_do="Load the page again and send from there. Programs send a key in the header Authorization, and no "
        "cookie.",
    ),
    ProblemKind(
        name="sign-in-refused",
        status=403,
        title="The link or the key signs nobody in",
        what_to_do="A link works once, within 15 minutes. Sign in by POST /sign-in with a key in force instead.",
    ),
    ProblemKind(
        name="key-unknown",
        status=404,
        title="No key has this id",
        what_to_do="GET /v1/keys lists the keys there are.",
    ),
    ProblemKind(
        name="too-many-requests",
        status=429,
        title="Requests come too often",
        what_to_do="Wait the seconds that Retry-After says, then ask again; RateLimit tells in every answer how many "
        "requests are left.",
        try_again=True,
    ),
    ProblemKind(
        name="service-busy",
        status=503,
        title="The service has more to do than it can",
        what_to_do="Nothing was done. Wait the seconds that Retry-After says, then send the same request again, with "
        "the same Idempotency-Key.",
        try_again=True,
    ),
    ProblemKind(
        name="internal-error",
        status=500,
        title="The service failed",
        what_to_do="This is a fault of ours, not of the request. Its trace is in the service's log; please report it "
        "with the tune and the settings that led to it.",
        try_again=True,
    ),
)
