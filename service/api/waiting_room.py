"""How many requests of this process may wait or stream at a time, so that threads are left for all others.

A request that waits and a stream of events each hold a thread. Who finds no place is not refused: it is answered
with what there is at the moment, as if it had waited so long already.
"""

import threading

from flask import Flask, current_app

WAITING_ROOM = "discwright waiting room"


class WaitingRoom:
    """Places for requests that wait; shared by the threads of a process."""

    def __init__(self, places: int | None = None) -> None:
        """Open it.

        Args:
            places: How many there are; None where nobody is short of threads.
        """
        self._free = None if places is None else threading.Semaphore(places)

    def enter(self) -> bool:
        """Take a place; False where none is free. Who took one gives it back by `leave`."""
        return self._free is None or self._free.acquire(blocking=False)

    def leave(self) -> None:
        """Give a place back."""
        if self._free is not None:
            self._free.release()


def open_waiting_room(app: Flask, places: int | None) -> None:
    """Say how many requests of an app may wait at a time; where nobody says, as many as like.

    Args:
        app: The app.
        places: How many; None for as many as like.
    """
    app.extensions[WAITING_ROOM] = WaitingRoom(places)


def waiting_room() -> WaitingRoom:
    """The waiting room of the app of the request at hand."""
    room: WaitingRoom = current_app.extensions.get(WAITING_ROOM) or WaitingRoom()
    return room
