"""Which kinds of problems an operation may tell: those it names, and those that follow from what it is."""

from service.api.asking import Access, Openness
from service.api.describing import Operation
from service.api.own_pages import SAFE_METHODS
from service.api.problems import PROBLEMS

EVERYWHERE = (
    "request-malformed",
    "request-too-slow",
    "address-too-long",
    "head-too-large",
    "service-busy",
    "internal-error",
)
OF_THE_STORE = ("store-busy", "store-full")
OF_KEYS = ("key-missing", "key-refused")


def problems_of(operation: Operation, access: Access, method: str, *, has_path: bool) -> dict[int, tuple[str, ...]]:
    """The names of the kinds by their status, both in order.

    Args:
        operation: What is described.
        access: Who may ask.
        method: Of HTTP.
        has_path: Whether its path has parameters.
    """
    names = {*EVERYWHERE, *operation.problems, *_of_access(access, method), *_of_bodies(operation)}
    if has_path:
        names.add("route-unknown")
    if operation.query is not None:
        names.add("parameter-invalid")
    fields = {field.name for field in operation.headers}
    if "Idempotency-Key" in fields:
        names |= {"key-reused", "still-running", "answer-deleted"}
    by_status: dict[int, tuple[str, ...]] = {}
    for name in sorted(names):
        status = PROBLEMS[name].status
        by_status[status] = (*by_status.get(status, ()), name)
    return dict(sorted(by_status.items()))


def _of_access(access: Access, method: str) -> set[str]:
    names: set[str] = set()
    if access.is_counted:
        names |= {"too-many-requests", *OF_THE_STORE}
    if access.openness is not Openness.ALL or access.scope is not None:
        names |= set(OF_KEYS)
        if method not in SAFE_METHODS:
            names.add("write-not-vouched")
    if access.scope is not None:
        names.add("scope-missing")
    return names


def _of_bodies(operation: Operation) -> set[str]:
    if not operation.bodies:
        return set()
    names = {"upload-too-large", "media-type-unsupported"}
    return names | {"document-invalid"} if operation.checked_by else names
