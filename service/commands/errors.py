"""What ends a command, and the codes it ends with."""

GOOD = 0
NOT_IN_ORDER = 1  # check-setup found something wrong
BAD_INPUT = 2
ERROR_STANDS = 3  # an error-level finding: the disc is not good to cut
INTERRUPTED = 130  # common practice: 128 + the number of SIGINT
PIPE_CLOSED = 141  # common practice: 128 + the number of SIGPIPE


class CommandError(Exception):
    """The command cannot do what is asked; the text is one line that says why and what to do."""
