"""The page on a local address, and the news of its drawings as server-sent events."""

from __future__ import annotations

import asyncio
import json
from collections.abc import AsyncIterator
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from layoutgen.watch.redraw import Drawing
from layoutgen.writers.report_html import empty_page

if TYPE_CHECKING:
    from starlette.applications import Starlette
    from starlette.requests import Request
    from starlette.responses import Response

__all__ = ["LOOPBACK", "Stage", "application"]

LOOPBACK = "127.0.0.1"
_QUIET = 15.0
"""Seconds after which a listener is sent an empty line, so that a lost one is noticed [s]."""


@dataclass(slots=True)
class Stage:
    """What is shown: the last drawing that could be made, the faults since, whether one is being made.

    Args:
        name: Name of the circuit file, for people.
    """

    name: str
    drawing: Drawing = field(default_factory=Drawing)
    faults: tuple[str, ...] = ()
    busy: bool = True
    closed: bool = False
    changed: asyncio.Condition = field(default_factory=asyncio.Condition)

    async def begin(self) -> None:
        """Say that a drawing is being made."""
        self.busy = True
        await self._tell()

    async def finish(self, drawing: Drawing) -> None:
        """Show a drawing, or its faults above the one before."""
        self.busy, self.faults = False, drawing.faults
        if not drawing.faults:
            self.drawing = drawing
        await self._tell()

    async def close(self) -> None:
        """Let all listeners go."""
        self.closed = True
        await self._tell()

    async def _tell(self) -> None:
        async with self.changed:
            self.changed.notify_all()

    @property
    def page(self) -> bytes:
        """The page to show now."""
        return self.drawing.page or empty_page(self.name)

    def news(self) -> str:
        """Return the state as one event."""
        state = {
            "name": self.name,
            "version": self.drawing.version,
            "faults": self.faults,
            "busy": self.busy,
        }
        return f"event: state\ndata: {json.dumps(state)}\n\n"

    async def events(self) -> AsyncIterator[str]:
        """Yield the state now and whenever it changes, until the server closes."""
        sent = ""
        while not self.closed:
            news = self.news()
            yield news if news != sent else ": still here\n\n"
            sent = news
            async with self.changed:
                if self.news() == sent and not self.closed:
                    await self._next()

    async def _next(self) -> None:
        """Wait for a change, at most for :data:`_QUIET`; the condition is held."""
        try:
            await asyncio.wait_for(self.changed.wait(), _QUIET)
        except TimeoutError:
            return


def application(stage: Stage) -> Starlette:
    """Return the server's application: the page at ``/``, its news at ``/events``, nothing else.

    Requests that name another host than this machine are refused, so that no foreign page can read it.
    """
    from starlette.applications import Starlette
    from starlette.middleware import Middleware
    from starlette.middleware.trustedhost import TrustedHostMiddleware
    from starlette.responses import HTMLResponse, Response, StreamingResponse
    from starlette.routing import Route

    async def page(request: Request) -> Response:
        return HTMLResponse(stage.page, headers={"Cache-Control": "no-store"})

    async def events(request: Request) -> Response:
        return StreamingResponse(
            stage.events(), media_type="text/event-stream", headers={"Cache-Control": "no-store"}
        )

    async def icon(request: Request) -> Response:
        return Response(status_code=204)

    hosts = Middleware(TrustedHostMiddleware, allowed_hosts=[LOOPBACK, "localhost"], www_redirect=False)
    routes = [Route("/", page), Route("/events", events), Route("/favicon.ico", icon)]
    return Starlette(routes=routes, middleware=[hosts])
