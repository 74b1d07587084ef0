"""The kinds of errors of hooks and their deliveries."""

from service.api.problem_kinds import ProblemKind

KINDS = (
    ProblemKind(
        name="hook-unknown",
        status=404,
        title="No hook has this id",
        what_to_do="GET /v1/hooks lists the hooks there are; those of keys for tests where such a key asks.",
    ),
    ProblemKind(
        name="delivery-unknown",
        status=404,
        title="No delivery has this id",
        what_to_do="GET /v1/hooks/ID/deliveries lists them; old ones are deleted after a while.",
    ),
    ProblemKind(
        name="hook-exists",
        status=409,
        title="There is a hook for this address already",
        what_to_do="hook says which one. PATCH it, or POST to its secret where you do not know that.",
    ),
    ProblemKind(
        name="hook-off",
        status=409,
        title="The hook is turned off",
        what_to_do="Mend the receiver, then POST /v1/hooks/ID/enable. GET /v1/events tells what was missed.",
    ),
    ProblemKind(
        name="too-many-hooks",
        status=409,
        title="There are as many hooks as there may be",
        what_to_do="Delete one that is not needed; one hook can be told of all orders.",
    ),
)
