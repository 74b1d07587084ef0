"""Sends to addresses that others name, and to none they should not reach (server-side request forgery).

A hook's URL is read strictly; its name is looked up once for each try, every address that comes back must be
public, and the connection goes to one of the very addresses that were looked at. No redirect is followed, no proxy
of the environment asked, and time and size have limits.
Source of the rules: OWASP, Server-Side Request Forgery Prevention Cheat Sheet, case 2; the addresses are those of
IANA's registries of special-purpose addresses, RFC 6890 and its updates.
"""

import ipaddress
import re
import socket
import threading
from collections.abc import Callable, Sequence
from concurrent.futures import Future, wait
from dataclasses import dataclass
from urllib.parse import SplitResult, urlsplit

from service.limits import HOOK_LIMITS
from service.variables import Network

MOST_NAME_CHARACTERS = 253  # RFC 1035, section 2.3.4: 255 octets with their counts
MOST_PORT = 65_535
DEFAULT_PORTS = {"https": 443, "http": 80}
LABEL = re.compile(r"[a-z0-9_]([a-z0-9_-]{0,61}[a-z0-9_])?")
PLACE = re.compile(r"(?P<host>\[[0-9a-f:.]+\]|[^:\[\]]+)(:(?P<port>.*))?")
# What some readers of URLs take for a number, and so for an IPv4 address: 2130706433, 0x7f.1, 127.1, 0177.0.0.1.
NUMBER = re.compile(r"[0-9]+|0x[0-9a-f]*")

Address = ipaddress.IPv4Address | ipaddress.IPv6Address
Resolver = Callable[[str, int], Sequence[str]]

# IANA hands out global unicast addresses of this block alone; beside it only NAT64's own prefix leads anywhere.
GLOBAL_UNICAST = ipaddress.IPv6Network("2000::/3")
NAT64 = ipaddress.IPv6Network("64:ff9b::/96")  # RFC 6052: the IPv4 address is its last 32 bits
# What ipaddress.is_global does not know in every version of Python, or counts as global.
NOT_PUBLIC: tuple[Network, ...] = (
    ipaddress.IPv4Network("192.0.0.0/24"),  # protocol assignments, RFC 6890
    ipaddress.IPv4Network("192.88.99.0/24"),  # relays of 6to4, withdrawn by RFC 7526
    ipaddress.IPv6Network("2001::/23"),  # protocol assignments, with Teredo: RFC 2928, RFC 4380
    ipaddress.IPv6Network("3fff::/20"),  # documentation, RFC 9637
)


class UrlError(ValueError):
    """A URL that no hook may have; the text says what is allowed."""


class AddressRefusedError(Exception):
    """A name leads to no address, or to one that hooks must not reach."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Target:
    """Where a URL leads, its host not looked up yet.

    Attributes:
        scheme: "https" or "http".
        host: A name in small letters, or an IP address without brackets.
        port: From 1 to 65535.
        path: Path and query, as they go into the request.
    """

    scheme: str
    host: str
    port: int
    path: str

    @property
    def authority(self) -> str:
        """The header field Host."""
        host = f"[{self.host}]" if ":" in self.host else self.host
        return host if self.port == DEFAULT_PORTS[self.scheme] else f"{host}:{self.port}"

    @property
    def literal(self) -> Address | None:
        """The address that the host is, None where it is a name."""
        try:
            return ipaddress.ip_address(self.host)
        except ValueError:
            return None


@dataclass(frozen=True, slots=True, kw_only=True)
class Rules:
    """What hooks may reach.

    Attributes:
        networks: Networks beside the public ones.
        allow_http: Whether TLS may be done without.
    """

    networks: tuple[Network, ...] = ()
    allow_http: bool = False


def read_url(url: str, rules: Rules) -> Target:
    """Where a URL leads.

    Raises:
        UrlError: It is not a plain http or https URL, or its host is an address that hooks must not reach.
    """
    if not url or len(url) > HOOK_LIMITS.url_characters:
        raise UrlError(f"the URL has {len(url)} characters; from 1 to {HOOK_LIMITS.url_characters} are taken")
    if not re.fullmatch(r"[!-~]+", url) or "\\" in url:
        raise UrlError("the URL holds a blank, a backslash or a letter outside ASCII; write names as xn--… and percent")
    try:
        parts = urlsplit(url)
    except ValueError as fault:
        raise UrlError(f"the URL cannot be read: {fault}") from fault
    schemes = ("https", "http") if rules.allow_http else ("https",)
    if parts.scheme not in schemes:
        raise UrlError(f"the URL begins with {parts.scheme or 'no scheme'!r}; taken is {' or '.join(schemes)}")
    if "@" in parts.netloc:
        raise UrlError("the URL holds a user or a password; messages are signed instead")
    if parts.fragment or url.endswith("#"):
        raise UrlError("the URL holds a fragment (#…), which no server gets to see")
    place = PLACE.fullmatch(parts.netloc.lower())
    if place is None:
        raise UrlError(f"the URL names no host that can be read: {parts.netloc!r}")
    target = Target(
        scheme=parts.scheme, host=_host(place["host"]), port=_port(place["port"], parts.scheme), path=_path(parts)
    )
    if target.literal is not None and not is_allowed(target.literal, rules.networks):
        raise UrlError(f"{target.host} is not a public address; only public addresses are told")
    return target


def checked_addresses(target: Target, rules: Rules, *, resolve: Resolver) -> tuple[str, ...]:
    """The addresses that a target has at this moment, every one of them allowed; within the limit's time.

    Args:
        target: Where to.
        rules: What is allowed.
        resolve: Looks a name up, called once; not called where the host is an address.

    Raises:
        AddressRefusedError: There is none, or one of them is not allowed.
    """
    if target.literal is not None:
        found = [str(target.literal)]
    else:
        try:
            found = _looked_up(target, resolve)
        except (OSError, UnicodeError) as fault:
            raise AddressRefusedError("the host's name cannot be looked up") from fault
    if not found:
        raise AddressRefusedError("the host's name has no address")
    for one in found:
        try:
            allowed = is_allowed(ipaddress.ip_address(one), rules.networks)
        except ValueError:
            allowed = False  # no address at all
        if not allowed:
            raise AddressRefusedError("the host's name leads to an address that is not public")
    return tuple(dict.fromkeys(found))


def _looked_up(target: Target, resolve: Resolver) -> list[str]:
    """The addresses of a name. Looking one up cannot be broken off, so one that hangs is left behind.

    Raises:
        AddressRefusedError: It took too long.
    """
    looked_up: Future[list[str]] = Future()

    def look_up() -> None:
        try:
            looked_up.set_result(list(resolve(target.host, target.port)))
        except Exception as fault:  # noqa: BLE001 -- it is raised where it is waited for
            looked_up.set_exception(fault)

    threading.Thread(target=look_up, name=f"look up {target.host}", daemon=True).start()
    # Not by the future's own timeout: the resolver may raise that very error itself.
    if not wait((looked_up,), HOOK_LIMITS.lookup_s).done:
        raise AddressRefusedError(f"the host's name was not looked up within {HOOK_LIMITS.lookup_s} s")
    return looked_up.result()


def is_allowed(address: Address, networks: Sequence[Network]) -> bool:
    """Whether hooks may reach an address: it is public, or in one of the networks.

    Args:
        address: An IPv4 address written as IPv6 counts as what it is.
        networks: What may be reached beside public addresses.
    """
    meant = _unwrapped(address)
    return any(meant in network for network in networks if network.version == meant.version) or is_public(meant)


def is_public(address: Address) -> bool:
    """Whether everybody on the internet reaches the same machine by this address, and it by nothing inner.

    An address that carries another in itself (IPv4-mapped, 6to4, NAT64) is public where both are.
    """
    meant = _unwrapped(address)
    if not meant.is_global or meant.is_multicast:
        return False
    if any(meant in network for network in NOT_PUBLIC if network.version == meant.version):
        return False
    if isinstance(meant, ipaddress.IPv4Address):
        return True
    if meant in NAT64:
        return is_public(ipaddress.IPv4Address(int(meant) & 0xFFFF_FFFF))
    if meant.sixtofour is not None:
        return is_public(meant.sixtofour)
    return meant in GLOBAL_UNICAST


def system_resolver(host: str, port: int) -> Sequence[str]:
    """Every address of a name, of both kinds, as this machine looks them up.

    Raises:
        OSError: It cannot be looked up.
    """
    found = socket.getaddrinfo(host, port, family=socket.AF_UNSPEC, type=socket.SOCK_STREAM)
    return [str(address[0]) for *_, address in found]


def _unwrapped(address: Address) -> Address:
    mapped = address.ipv4_mapped if isinstance(address, ipaddress.IPv6Address) else None
    return address if mapped is None else mapped


def _host(written: str) -> str:
    if written.startswith("["):
        try:
            return str(ipaddress.IPv6Address(written[1:-1]))
        except ValueError:
            return _no_host(written)
    labels = written.split(".")
    if NUMBER.fullmatch(labels[-1]):
        try:
            return str(ipaddress.IPv4Address(written))  # four decimal numbers without leading zeros, nothing else
        except ValueError:
            return _no_host(written)
    if len(written) > MOST_NAME_CHARACTERS or not all(LABEL.fullmatch(label) for label in labels):
        return _no_host(written)
    return written


def _no_host(written: str) -> str:
    raise UrlError(f"the host {written!r} is neither a name such as shop.example nor a plain IP address")


def _port(written: str | None, scheme: str) -> int:
    if written is None:
        return DEFAULT_PORTS[scheme]
    if not re.fullmatch(r"[1-9][0-9]{0,4}", written) or int(written) > MOST_PORT:
        raise UrlError(f"the port {written!r} is not a whole number from 1 to {MOST_PORT}")
    return int(written)


def _path(parts: SplitResult) -> str:
    return (parts.path or "/") + (f"?{parts.query}" if parts.query else "")
