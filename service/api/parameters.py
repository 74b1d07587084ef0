"""The query of a request about layouts."""

from dataclasses import dataclass

from werkzeug.datastructures import MultiDict

from service.api.problems import ProblemError
from service.reason import ReasonError, checked_reason

_SHOWN_CHARACTERS = 80  # of a name that is none, so that the answer stays readable


@dataclass(frozen=True, slots=True, kw_only=True)
class Query:
    """What the query of a request asks.

    Attributes:
        movement: Id of a movement, or None.
        cutter: Id of a cutter, or None.
        reason: Why cutting files shall be given although an error-level finding stands, or None.
    """

    movement: str | None
    cutter: str | None
    reason: str | None


def read_query(query: MultiDict[str, str], *, known: tuple[str, ...], most_reason_characters: int) -> Query:
    """The query, checked.

    Args:
        query: As it came.
        known: The parameters this address takes, of movement, cutter and despite_findings.
        most_reason_characters: How long a reason may be.

    Raises:
        ProblemError: A parameter is unknown, comes twice, or has a value that is not allowed.
    """
    for name, values in query.lists():
        if name not in known:
            others = f"known are {', '.join(known)}" if known else "none are taken"
            shown = name[:_SHOWN_CHARACTERS]
            raise _invalid(shown, f"there is no parameter called {shown!r} here; {others}")
        if len(values) > 1:
            raise _invalid(name, f"the parameter {name} comes {len(values)} times; give it once")
    return Query(
        movement=query.get("movement"),
        cutter=query.get("cutter"),
        reason=_reason(query.get("despite_findings"), most_reason_characters),
    )


def _reason(text: str | None, most_characters: int) -> str | None:
    if text is None:
        return None
    try:
        return checked_reason(text, most_characters=most_characters)
    except ReasonError as error:
        raise _invalid("despite_findings", f"despite_findings: {error}") from error


def _invalid(name: str, detail: str) -> ProblemError:
    return ProblemError(name="parameter-invalid", detail=detail, more={"parameter": name})
