"""How a web process waits for slow clients: in its event loop, where a wait costs nothing, and never in a thread.

Gunicorn's worker with threads reads each request in a thread and takes leave of each client in its event loop. So a
few connections that say nothing, or that stay open after their answer, hold all threads or the loop, for seconds
each. Here the loop gathers a request and a thread takes it when it is whole; leave is taken without waiting. What is
too long to be gathered is read in a thread, but only a share of them does so at a time. A few threads are kept for
those who ask how the service is. Where more requests wait for a thread than can be answered soon, the next is told at
once to come again. Times and sizes stand in `service.limits`.

There is no TLS, no HTTP/2 and no second request on a connection here: they are a proxy's.
"""

import errno
import logging
import selectors
import socket
import sys
import time
from collections import Counter, deque
from concurrent.futures import Future, ThreadPoolExecutor
from contextlib import suppress
from functools import partial
from typing import Any, ClassVar

from gunicorn import http
from gunicorn.http.errors import InvalidResponseHeader, InvalidResponseHeaderName, ParseException
from gunicorn.workers.gthread import TConn, ThreadWorker

from service.limits import Limits
from service.web_addresses import address_of
from service.web_gathering import Gathering, Pace, SlowBodyError, Step
from service.web_refusals import refusal, refusal_of
from service.web_turns import Turns, give_up_turn

READING_SHARE = 0.25  # of the threads, for bodies too long to be gathered
SPARE_THREADS = 2  # beside the others, for those who ask how the service is
SPARE_PATHS = frozenset({"/healthz", "/readyz", "/metrics"})
PIECE_BYTES = 64 * 1024  # taken from a connection at a time
# A process whose threads all work leaves new connections so long to the others, then takes them all the same.
LEAVE_TO_OTHERS_S = 0.05
MOST_TAKEN_AT_ONCE = 64  # connections
LOOK_EVERY_S = 0.25  # at whose time is up
SIGN_OF_LIFE_EVERY_S = 0.5  # s; gunicorn writes one at every turn of the loop, some thousands a second
STOP_LINGER_S = 2.0  # s; that a process told to stop waits for the rest of a request
ANSWER_FAULTS = (InvalidResponseHeader, InvalidResponseHeaderName)  # of the app's own answer
FAILED = "the service failed; its log holds the trace"
NO_MORE_FILES = (errno.EMFILE, errno.ENFILE)
NOBODY_THERE = (errno.EAGAIN, errno.EWOULDBLOCK, errno.ECONNABORTED)
# s; that a thread computes before another has its turn. By Python's own 5 ms who waits behind a thread that computes
# waits so long for each of the turns that a request needs, health too. At half a millisecond it costs 4 % of a layout
# where eight threads want turns, and nothing where two do, measured.
TURN_S = 0.00025
LEAVE_SHARE = 0.5  # of the connections a process may have, beyond which who sent nothing is let go without a word
TOO_MANY_UNFINISHED = "too many requests are on their way at a time"
COME_AGAIN_S = 2  # s; in which a full process answers most of what waits

log = logging.getLogger("discwright")


class _PacedBody:
    """What gunicorn reads a request from: what was gathered, then the connection, as long as it keeps the pace."""

    def __init__(self, connection: socket.socket, pace: Pace, arrived_bytes: int, taker_s: float) -> None:
        self._connection = connection
        self._pace = pace
        self._arrived_bytes = arrived_bytes
        self._taker_s = taker_s
        self._is_over = False

    def recv(self, most_bytes: int) -> bytes:
        """As a socket's.

        Raises:
            SlowBodyError: The pace was not kept; told once, after that the body has ended.
        """
        if self._is_over:
            return b""
        give_up_turn()  # a slow sender's thread waits, and works no more
        left_s = self._pace.due_s(self._arrived_bytes) - time.monotonic()
        try:
            if left_s <= 0:
                raise TimeoutError
            self._connection.settimeout(left_s)
            piece = self._connection.recv(most_bytes)
        except TimeoutError as fault:
            self._is_over = True
            raise SlowBodyError from fault
        finally:
            self._connection.settimeout(self._taker_s)
        self._arrived_bytes += len(piece)
        return piece


class Connection(TConn):  # type: ignore[misc]
    """A connection, with what has arrived on it."""

    def __init__(self, cfg: Any, sock: socket.socket, client: Any, server: Any, limits: Limits) -> None:
        """Take it over; nothing has arrived."""
        super().__init__(cfg, sock, client, server)
        self.address = address_of(client)
        self.gathering = Gathering(limits, time.monotonic())
        self.data_ready = True  # gunicorn shall not wait for it once more
        self.reads_on = False
        self.is_spare = False
        self.is_watched = False  # whether the loop looks for more of its request
        self.leaves_at_s = 0.0
        self._taker_s = limits.taker_s

    def init(self) -> None:
        """Get ready for gunicorn to read the request; called in the thread that takes it."""
        self.initialized = True
        self.sock.settimeout(self._taker_s)
        pace = self.gathering.pace
        assert pace is not None  # a thread takes no request whose head is not whole
        source = _PacedBody(self.sock, pace, self.gathering.body_arrived_bytes, self._taker_s)
        self.parser = http.get_parser(self.cfg, source, self.client)
        self.parser.unreader.unread(self.gathering.arrived)


class GatheringWorker(ThreadWorker):  # type: ignore[misc]
    """A web process."""

    limits: ClassVar[Limits] = Limits()

    def __init__(self, *args: Any) -> None:
        """As gunicorn makes it, before it forks."""
        super().__init__(*args)
        self.worker_connections = self.limits.connections
        self._gathering: dict[Connection, None] = {}  # in the order in which they came
        self._of_address: Counter[str] = Counter()  # of those
        self._waiting_to_read: deque[Connection] = deque()  # of those too
        self._leaving: dict[Connection, None] = {}  # in the order in which they will have left
        self._spare: ThreadPoolExecutor  # like `tpool`
        self._turns = Turns()
        self._busy = 0
        self._reading: Counter[str] = Counter()  # by address
        self._most_reading = max(1, int(self.cfg.threads * READING_SHARE))
        self._takes_all_the_same_at_s = 0.0
        self._sign_of_life_due_s = 0.0
        self._stops_at_s: float | None = None

    def get_thread_pool(self) -> ThreadPoolExecutor:
        """The threads, and how they take turns; made after the fork."""
        sys.setswitchinterval(TURN_S)
        self._spare = ThreadPoolExecutor(max_workers=SPARE_THREADS)
        return ThreadPoolExecutor(max_workers=self.cfg.threads)

    # The loop.

    def notify(self) -> None:
        """Show the arbiter that the loop turns."""
        now_s = time.monotonic()
        if now_s >= self._sign_of_life_due_s:
            self._sign_of_life_due_s = now_s + SIGN_OF_LIFE_EVERY_S
            super().notify()

    def set_accept_enabled(self, enabled: bool) -> None:  # noqa: FBT001 -- as gunicorn calls it
        """Take new connections as they come, or leave them to the other processes."""
        super().set_accept_enabled(enabled and self._busy < self.cfg.threads)

    def wait_for_and_dispatch_events(self, timeout: float) -> None:
        """One turn of the loop."""
        if self.alive:
            self._mind_listeners()
        elif self._stops_at_s is None:
            self._stops_at_s = time.monotonic() + STOP_LINGER_S
            self._take_all()  # who came before the signal is answered
        is_quiet = not (self._gathering or self._leaving or self._busy)
        # Who was left to the others is taken when that time is up, though nothing else comes.
        look_after_s = LOOK_EVERY_S if self._accepting else LEAVE_TO_OTHERS_S
        super().wait_for_and_dispatch_events(timeout if is_quiet else min(timeout, look_after_s))
        self._look_at_times()

    def _mind_listeners(self) -> None:
        has_room = self.nr_conns < self.worker_connections
        self.set_accept_enabled(has_room)
        now_s = time.monotonic()
        if self._accepting or not has_room:
            self._takes_all_the_same_at_s = now_s + LEAVE_TO_OTHERS_S
        elif now_s >= self._takes_all_the_same_at_s:
            self._takes_all_the_same_at_s = now_s + LEAVE_TO_OTHERS_S
            self._take_all()

    def _take_all(self) -> None:
        for listener in self.sockets:
            for _ in range(MOST_TAKEN_AT_ONCE):
                if not self.accept(listener):
                    break

    def accept(self, listener: Any) -> bool:
        """Take a new connection; False where there is none."""
        try:
            sock, client = listener.accept()
        except OSError as fault:
            if fault.errno in NO_MORE_FILES:
                self._let_go_of_one("")
            elif fault.errno not in NOBODY_THERE:
                raise
            return False
        connection = Connection(self.cfg, sock, client, listener.getsockname(), self.limits)
        self.nr_conns += 1
        if connection.address and self._of_address[connection.address] >= self.limits.connections_per_address:
            self._let_go_of_one(connection.address)
        elif self.nr_conns >= self.worker_connections:
            self._let_go_of_one("")
        self._gathering[connection] = None
        self._of_address[connection.address] += 1
        self._gather(connection)  # most send their request with the connection
        if connection in self._gathering and connection not in self._waiting_to_read:
            self.poller.register(connection.sock, selectors.EVENT_READ, partial(self._gather, connection))
            connection.is_watched = True
        return True

    # Requests on their way.

    def _gather(self, connection: Connection, _: Any = None) -> None:
        if connection not in self._gathering:
            return  # let go in this very turn
        try:
            piece = connection.sock.recv(PIECE_BYTES)
        except BlockingIOError:
            return
        except OSError:
            piece = b""
        if not piece:
            # Gunicorn sees the end too, and tells of a body that is cut short.
            step = Step.ANSWER if connection.gathering.pace is not None else Step.REFUSE
        else:
            step = connection.gathering.take(piece, time.monotonic())
        match step:
            case Step.ANSWER:
                self._answer_or_refuse(connection)
            case Step.READ_ON:
                self._no_longer_watched(connection)
                self._waiting_to_read.append(connection)
                self._let_one_read_on()
            case Step.REFUSE:
                told = f"the head of the request is longer than {self.limits.head_bytes} bytes"
                self._refuse(connection, refusal("head-too-large", told) if piece else b"")

    def _answer_or_refuse(self, connection: Connection) -> None:
        """Give a whole request to a thread, unless too many wait for one: those who ask how the service is never do."""
        waiting = self._busy - self.cfg.threads
        if waiting >= self.limits.waiting_requests and not self._asks_how_it_is(connection):
            told = f"{waiting} requests wait for a thread, and no more than {self.limits.waiting_requests} may"
            self._refuse(connection, refusal("service-busy", told, retry_after_s=COME_AGAIN_S))
            return
        self._no_longer_gathered(connection)
        self.enqueue_req(connection)

    def handle_error(self, req: Any, client: Any, addr: Any, exc: Exception) -> None:
        """Tell a client why its request was not read, or that the service failed; the app knows nothing of either."""
        is_theirs = isinstance(exc, ParseException) and not isinstance(exc, ANSWER_FAULTS)
        if is_theirs:
            log.info("a request could not be read: %r", exc)
        else:
            log.error("a request failed outside the app", exc_info=exc)
        with suppress(OSError):
            client.sendall(refusal_of(exc) if is_theirs else refusal("internal-error", FAILED))

    def _let_one_read_on(self) -> None:
        if self._waiting_to_read and self._reading.total() < self._most_reading:
            # The first of those whose address reads least.
            connection = min(self._waiting_to_read, key=lambda one: self._reading[one.address])
            self._no_longer_gathered(connection)
            connection.reads_on = True
            connection.gathering.begin_pace_anew(time.monotonic())
            self._reading[connection.address] += 1
            self.enqueue_req(connection)

    def enqueue_req(self, connection: Connection) -> None:
        """Give a request to a thread."""
        is_spare = self._asks_how_it_is(connection)
        self._busy += not is_spare
        connection.is_spare = is_spare
        done = self._spare.submit(self.handle, connection) if is_spare else self.tpool.submit(self._handle, connection)
        done.add_done_callback(lambda future: self.method_queue.defer(self.finish_request, connection, future))

    def _handle(self, connection: Connection) -> bool:
        with self._turns.turn():
            return bool(self.handle(connection))

    def _asks_how_it_is(self, connection: Connection) -> bool:
        return connection.gathering.path in SPARE_PATHS and not connection.reads_on

    def handle_request(self, req: Any, conn: Connection) -> bool:
        """Answer a request; called in a thread."""
        try:
            return bool(super().handle_request(req, conn))
        except TimeoutError:
            log.warning("an answer was broken off: nothing of it was taken for too long")
            return False

    # Leave.

    def finish_request(self, connection: Connection, future: Future[bool]) -> None:
        """Take leave of who was answered; called in the loop."""
        self._busy -= not connection.is_spare
        if connection.reads_on:
            self._reading[connection.address] -= 1
            self._let_one_read_on()
        self._take_leave(connection)

    def _refuse(self, connection: Connection, told: bytes) -> None:
        """Let go of a request that is not whole; nothing is told where nobody would hear it."""
        self._no_longer_gathered(connection)
        if not told:
            self._close(connection)
            return
        with suppress(OSError):
            connection.sock.send(told)  # some hundred bytes into an empty buffer
        self._take_leave(connection)

    def _take_leave(self, connection: Connection) -> None:
        """Close a connection so that the client gets to read all (RFC 9112 section 9.6), without waiting for it."""
        try:
            connection.sock.shutdown(socket.SHUT_WR)
            connection.sock.setblocking(False)  # noqa: FBT003 -- as sockets have it
            self.poller.register(connection.sock, selectors.EVENT_READ, partial(self._hear_out, connection))
        except (OSError, ValueError):
            self._close(connection)
            return
        connection.leaves_at_s = time.monotonic() + self.limits.linger_s
        self._leaving[connection] = None

    def _hear_out(self, connection: Connection, _: Any) -> None:
        try:
            if connection not in self._leaving or connection.sock.recv(PIECE_BYTES):
                return
        except BlockingIOError:
            return
        except OSError:
            pass  # the client broke off
        self._left(connection)

    def _left(self, connection: Connection) -> None:
        del self._leaving[connection]
        self.poller.unregister(connection.sock)
        self._close(connection)

    def _close(self, connection: Connection) -> None:
        self.nr_conns -= 1
        connection.close()

    def _no_longer_gathered(self, connection: Connection) -> None:
        del self._gathering[connection]
        self._of_address[connection.address] -= 1
        if not self._of_address[connection.address]:
            del self._of_address[connection.address]
        if connection in self._waiting_to_read:
            self._waiting_to_read.remove(connection)
        self._no_longer_watched(connection)

    def _no_longer_watched(self, connection: Connection) -> None:
        if connection.is_watched:
            self.poller.unregister(connection.sock)
            connection.is_watched = False

    def _let_go_of_one(self, address: str) -> None:
        """Let go of the request that has been on its way longest: of an address, or of any where that is empty."""
        for connection in self._gathering:
            if address in ("", connection.address):
                told = self._told_of(connection)
                if not told and self.nr_conns < LEAVE_SHARE * self.worker_connections:
                    # What it sends may be on its way. Where many are let go, each would hold a place while it leaves.
                    told = refusal("service-busy", TOO_MANY_UNFINISHED, retry_after_s=COME_AGAIN_S)
                self._refuse(connection, told)
                return

    def _look_at_times(self) -> None:
        now_s = time.monotonic()
        for connection in list(self._gathering):
            if now_s >= self._due_s(connection.gathering):
                self._refuse(connection, self._told_of(connection))
        while self._leaving and (first := next(iter(self._leaving))).leaves_at_s <= now_s:
            self._left(first)

    def _due_s(self, gathering: Gathering) -> float:
        if self._stops_at_s is None:
            return gathering.due_s
        return 0.0 if gathering.is_silent else min(gathering.due_s, self._stops_at_s)

    def _told_of(self, connection: Connection) -> bytes:
        if connection.gathering.is_silent:
            return b""
        log.info("a request that came too slowly was let go")
        return refusal("request-too-slow", "the request was not all there in time")
