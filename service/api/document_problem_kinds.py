"""The kinds of errors of movements and cutters that are kept, and of answers whose matter was deleted."""

from service.api.problem_kinds import ProblemKind

KINDS = (
    ProblemKind(
        name="precondition-required",
        status=428,
        title="The request does not say which revision it is about",
        what_to_do="GET the document and send its entity tag in If-Match, so that nobody's change is lost. To make a "
        "new one, send If-None-Match: * instead.",
    ),
    ProblemKind(
        name="document-changed",
        status=412,
        title="The document is not as it was when it was read",
        what_to_do="GET it again, look at what changed, then send the change again with its new entity tag.",
    ),
    ProblemKind(
        name="document-not-own",
        status=409,
        title="The document is not this owner's",
        what_to_do="Documents of the shop, and those that ship, cannot be withdrawn. To use another in their place, "
        "PUT one of your own under the same id.",
    ),
    ProblemKind(
        name="key-for-tests",
        status=403,
        title="A key for tests may not do this",
        what_to_do="Movements and cutters are what real orders are planned with. Use a key that is not for tests.",
    ),
    ProblemKind(
        name="answer-deleted",
        status=410,
        title="What this request made was deleted since",
        what_to_do="The request was done once and is not done again. Take a new Idempotency-Key for a new request.",
    ),
)
