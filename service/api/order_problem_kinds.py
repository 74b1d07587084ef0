"""The kinds of errors of orders, their files, quotes and runs, and of the store they are kept in."""

from service.api.problem_kinds import ProblemKind

KINDS = (
    ProblemKind(
        name="order-unknown",
        status=404,
        title="There is no such thing for this key",
        what_to_do="Check the id, and that the key is of the owner who ordered. What belongs to others does not exist "
        "for a key.",
    ),
    ProblemKind(
        name="state-forbids",
        status=409,
        title="The state of the order does not allow this",
        what_to_do="Read the order again; its state says what may be done next, and its links where.",
    ),
    ProblemKind(
        name="findings-stand",
        status=422,
        title="A person must decide about this order",
        what_to_do="Read the findings in the order's files. Plan it anew with other settings, or release it with "
        "despite_findings, a reason; its drawings are then marked NOT GOOD TO CUT where an error stands.",
    ),
    ProblemKind(
        name="order-changed",
        status=412,
        title="The order is not as it was when it was read",
        what_to_do="Read it again, look at what changed, then decide with its new entity tag in If-Match; a release "
        "names the plan that was seen by its tag.",
    ),
    ProblemKind(
        name="not-released",
        status=409,
        title="Cutting files are given only after release",
        what_to_do="Wait for the event order.released, or release the order. Previews and reports may be had before.",
    ),
    ProblemKind(
        name="plan-superseded",
        status=409,
        title="The plan is superseded and not to be cut any more",
        what_to_do="Read the order for the plan in force. Add superseded=yes to see the old file all the same.",
    ),
    ProblemKind(
        name="proof-refused",
        status=404,
        title="The link shows nothing",
        what_to_do="Check that the whole link was copied, or ask the shop for a new one.",
    ),
    ProblemKind(
        name="not-priced",
        status=422,
        title="No price can be told",
        what_to_do="State the rates that detail names in the cutter document.",
    ),
    ProblemKind(
        name="archive-unreadable",
        status=422,
        title="The archive of tunes cannot be taken",
        what_to_do="Make a plain ZIP archive of MIDI files, without a password, within the limits that "
        "`GET /v1/limits` tells; detail says what is wrong with this one.",
    ),
    ProblemKind(
        name="key-reused",
        status=422,
        title="The Idempotency-Key was used for another request",
        what_to_do="Take a new key for a new request, or send just what was sent before to get its answer again.",
    ),
    ProblemKind(
        name="still-running",
        status=409,
        title="The same request is being answered at this moment",
        what_to_do="Wait the seconds that Retry-After says, then send it again to get its answer.",
        try_again=True,
    ),
    ProblemKind(
        name="range-unsatisfiable",
        status=416,
        title="The range asked for is not in the file",
        what_to_do="Content-Range says how large the file is. Ask for a range inside it, or for the whole.",
    ),
    ProblemKind(
        name="store-busy",
        status=503,
        title="The service cannot reach what it keeps its data in",
        what_to_do="Wait the seconds that Retry-After says, then send the same request again, with the same "
        "Idempotency-Key. Nothing is lost.",
        try_again=True,
    ),
    ProblemKind(
        name="store-full",
        status=507,
        title="There is no room left where the service keeps its data",
        what_to_do="Nothing was kept. Tell the shop to make room, then send the same request again.",
        try_again=True,
    ),
    ProblemKind(
        name="not-ready",
        status=503,
        title="The service is not ready",
        what_to_do="away names what does not answer; the service's log says why. Ask again in some seconds. "
        "`discwright check-setup`, run on the service's machine, says what to mend.",
        try_again=True,
    ),
)
