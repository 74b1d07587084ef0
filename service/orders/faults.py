"""Why something cannot be done with an order; each text is fit to show."""


class OrderFault(Exception):
    """Something cannot be done with an order."""


class OrderUnknownError(OrderFault):
    """There is no such order, or it belongs to another: the asker cannot tell which."""


class StateForbidsError(OrderFault):
    """The order's state, or a plan's, does not allow it."""


class FindingsStandError(OrderFault):
    """An error-level finding stands, and no reason was given to release all the same."""


class InputRefusedError(OrderFault):
    """A part of what was sent cannot be used.

    Attributes:
        pointer: JSON pointer of the part of the order document.
    """

    def __init__(self, pointer: str, message: str) -> None:
        super().__init__(message)
        self.pointer = pointer


class NotPricedError(OrderFault):
    """No price can be told; the text says which fields of the documents would tell it."""


class ChangedMeanwhileError(OrderFault):
    """Another change came first; read the order again."""
