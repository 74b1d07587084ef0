"""Hooks and deliveries as plain values, and their refusals as problems."""

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime
from typing import Any

from service.api.problems import ProblemError
from service.hooks.deliveries import DeliveryTold, DeliveryUnknownError, HookOffError
from service.hooks.keeping import HookExistsError, HookTold, HookUnknownError, HookWithSecret, TooManyHooksError
from service.moments import moment_text
from service.wording import shortened

MOST_CHARACTERS = 120  # of a refusal, which may repeat an id as it was sent


def hook_told(hook: HookTold) -> dict[str, Any]:
    """A hook as plain values."""
    return {
        "id": hook.id,
        "url": hook.url,
        "types": None if hook.types is None else list(hook.types),
        "for_all_orders": hook.for_all_orders,
        "is_test": hook.is_test,
        "created_at": moment_text(hook.created_at),
        "disabled_at": _moment(hook.disabled_at),
        "disabled_because": hook.disabled_because,
        "quiet_until": _moment(hook.quiet_until),
        "old_secrets_until": _moment(hook.old_secrets_until),
    }


def secret_told(made: HookWithSecret) -> dict[str, Any]:
    """A hook as plain values, with its secret."""
    return {**hook_told(made.hook), "secret": made.secret}


def delivery_told(delivery: DeliveryTold) -> dict[str, Any]:
    """A delivery as plain values."""
    return {
        "id": delivery.id,
        "hook": delivery.hook_id,
        "event": delivery.event_seq,
        "message": dict(delivery.message),
        "state": delivery.state,
        "tries": delivery.tries,
        "next_try_at": _moment(delivery.next_try_at),
        "last_status": delivery.last_status,
        "last_error": delivery.last_error,
        "created_at": moment_text(delivery.created_at),
        "finished_at": _moment(delivery.finished_at),
    }


@contextmanager
def hook_problems() -> Iterator[None]:
    """Refusals that concern hooks, as problems."""
    try:
        yield
    except HookUnknownError as fault:
        raise ProblemError(name="hook-unknown", detail=shortened(str(fault), MOST_CHARACTERS)) from fault
    except DeliveryUnknownError as fault:
        raise ProblemError(name="delivery-unknown", detail=shortened(str(fault), MOST_CHARACTERS)) from fault
    except HookExistsError as fault:
        raise ProblemError(name="hook-exists", detail=str(fault), more={"hook": fault.hook_id}) from fault
    except HookOffError as fault:
        raise ProblemError(name="hook-off", detail=str(fault)) from fault
    except TooManyHooksError as fault:
        raise ProblemError(name="too-many-hooks", detail=str(fault)) from fault


def _moment(at: datetime | None) -> str | None:
    return None if at is None else moment_text(at)
