"""The reason a person gives for having cutting files although an error-level finding stands."""


class ReasonError(ValueError):
    """The reason cannot be used; the text says why and what is allowed."""


def checked_reason(text: str, *, most_characters: int) -> str:
    """The reason, without spaces round it.

    Args:
        text: As the person gave it.
        most_characters: How long it may be.

    Raises:
        ReasonError: It is empty, too long, or holds a character that cannot be shown on one line (it is
            written into files whose lines mean something).
    """
    reason = text.strip()
    if not reason:
        raise ReasonError(f"the reason is empty; say in 1 to {most_characters} characters why it shall be cut")
    if len(reason) > most_characters:
        raise ReasonError(f"the reason has {len(reason)} characters; at most {most_characters} are allowed")
    if not reason.isprintable():
        raise ReasonError("the reason holds a line break or another character that cannot be printed; use one line")
    return reason
