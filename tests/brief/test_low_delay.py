"""The low-delay setting of `briefkit live`: a real socket without and with it, and where it cannot apply."""

from __future__ import annotations

import asyncio
import logging
import socket
import sys
from types import ModuleType
from typing import ClassVar

import pytest

from briefkit.brief.low_delay import send_at_once

WHERE = "jupyter_server.services.kernels.websocket"


def stand_in(monkeypatch, handler):
    """Another handler where the server's own is looked for."""
    module = ModuleType(WHERE)
    if handler is not None:
        module.KernelWebsocketHandler = handler
    monkeypatch.setitem(sys.modules, WHERE, module)


def no_delay_of_a_connection(handler_type) -> list[int]:
    """A websocket opened on loopback: TCP_NODELAY of the server's end, as the handler's own `open` finds it."""
    from tornado.httpserver import HTTPServer
    from tornado.web import Application
    from tornado.websocket import websocket_connect

    async def connect() -> list[int]:
        server = HTTPServer(Application([("/", handler_type)]))
        server.listen(0, "127.0.0.1")
        port = next(iter(server._sockets.values())).getsockname()[1]
        client = await websocket_connect(f"ws://127.0.0.1:{port}/")
        assert await client.read_message() == "open"
        client.close()
        server.stop()
        await server.close_all_connections()
        return handler_type.seen

    return asyncio.run(connect())


@pytest.fixture
def handler():
    from tornado.websocket import WebSocketHandler

    class Handler(WebSocketHandler):
        seen: ClassVar[list[int]] = []

        async def open(self):
            stream = self.ws_connection.stream
            self.seen.append(stream.socket.getsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY))
            await self.write_message("open")

    return Handler


def test_a_connection_sends_small_messages_at_once_only_with_it(monkeypatch, handler):
    assert no_delay_of_a_connection(handler) == [0]
    stand_in(monkeypatch, handler)
    assert send_at_once()
    once = handler.open
    assert send_at_once()
    assert handler.open is once
    assert no_delay_of_a_connection(handler)[1:] == [1]


@pytest.mark.parametrize("broken", [None, type("Handler", (), {}), type("Handler", (), {"open": lambda self: None})])
def test_where_the_private_handler_has_changed_nothing_happens_but_one_line(monkeypatch, caplog, broken):
    stand_in(monkeypatch, broken)
    before = dict(vars(broken)) if broken else {}
    with caplog.at_level(logging.WARNING, logger="briefkit.live"):
        assert not send_at_once()
    assert len(caplog.records) == 1
    assert "low delay not set" in caplog.text
    assert before == (dict(vars(broken)) if broken else {})


def test_a_connection_that_cannot_be_set_still_opens(monkeypatch, caplog, handler):
    def refuse(self, value):
        raise OSError("not this socket")

    monkeypatch.setattr(handler, "set_nodelay", refuse)
    stand_in(monkeypatch, handler)
    assert send_at_once()
    with caplog.at_level(logging.WARNING, logger="briefkit.live"):
        assert no_delay_of_a_connection(handler) == [0]
    assert "not this socket" in caplog.text


def test_the_installed_server_has_the_handler_it_looks_for(monkeypatch):
    websocket = pytest.importorskip(WHERE)
    monkeypatch.setattr(websocket.KernelWebsocketHandler, "open", websocket.KernelWebsocketHandler.open)
    assert send_at_once()
