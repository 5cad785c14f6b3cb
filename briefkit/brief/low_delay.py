"""Takes the wait out of the kernel's websocket: small messages leave at once.

The server never sets TCP_NODELAY there, so each picture of a moving slider waits some 45 ms for an acknowledgement of
the one before. The handler that would have to set it is a private class of another package: where it is not what it
was, all stays as it is, and one line says so.
"""

from __future__ import annotations

import logging
from collections.abc import Callable
from functools import wraps
from typing import Any, Final

LOG: Final = logging.getLogger("briefkit.live")
_MARK: Final = "_briefkit_sends_at_once"


def send_at_once() -> bool:
    """Make every kernel websocket opened from now on send small messages at once; True if that could be arranged.

    Never raises: it is a comfort, and a session must start without it. Calling it again changes nothing.
    """
    try:
        from jupyter_server.services.kernels.websocket import KernelWebsocketHandler

        handler: Any = KernelWebsocketHandler
        known = handler.open
        if getattr(known, _MARK, False):
            return True
        if not callable(handler.set_nodelay):
            raise TypeError("set_nodelay is not a method")
        handler.open = _opening(known)
    except Exception as error:  # whatever another package's insides have become
        LOG.warning("low delay not set (%s: %s); sliders may lag by some 50 ms", type(error).__name__, error)
        return False
    return True


def _opening(known: Callable[..., Any]) -> Callable[..., Any]:
    @wraps(known)
    def opened(handler: Any, *arguments: Any, **named: Any) -> Any:
        try:
            handler.set_nodelay(True)
        except Exception as error:
            LOG.warning("low delay not set on this connection (%s: %s)", type(error).__name__, error)
        return known(handler, *arguments, **named)

    setattr(opened, _MARK, True)
    return opened
