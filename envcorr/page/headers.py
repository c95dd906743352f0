"""The server of the page: a content-security policy on every answer, and no stack trace on screen."""

from __future__ import annotations

import base64
import hashlib
import re
from functools import cache
from importlib.resources import files
from typing import Any

__all__ = ["Headers", "fault", "headers", "middleware"]

POLICY = (
    "default-src 'self'; script-src 'self' {scripts}; style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; "
    "font-src 'self' data:; connect-src 'self' ws: data: blob:; worker-src 'self' blob:; object-src 'none'; "
    "base-uri 'self'; form-action 'self'; frame-ancestors 'none'"
)
"""Everything comes from this machine, and nothing is framed; the scripts are those of Streamlit's own first page."""


@cache
def headers() -> dict[str, str]:
    """Return what every answer carries."""
    index = files("streamlit").joinpath("static/index.html").read_text(encoding="utf-8")
    inline = re.findall(r"<script(?![^>]*\bsrc=)[^>]*>(.*?)</script>", index, flags=re.DOTALL)
    digests = (base64.b64encode(hashlib.sha256(text.encode()).digest()).decode() for text in inline)
    return {
        "content-security-policy": POLICY.format(scripts=" ".join(f"'sha256-{digest}'" for digest in digests)),
        "x-content-type-options": "nosniff",
        "referrer-policy": "no-referrer",
    }


class Headers:
    """Adds the headers to the answers of another ASGI application."""

    def __init__(self, app: Any) -> None:
        self.app = app

    async def __call__(self, scope: Any, receive: Any, send: Any) -> None:
        """Answer as the other application does."""

        async def sending(message: Any) -> None:
            if message["type"] == "http.response.start":
                own = [(name.encode(), value.encode()) for name, value in headers().items()]
                message = {**message, "headers": [*message.get("headers", ()), *own]}
            await send(message)

        await self.app(scope, receive, sending)


def fault(error: Exception) -> bool:
    """Show that something went wrong in the program, and nothing of where; return that this is all."""
    from envcorr.page import show

    show.line(f"A fault of the program, not of the input: {type(error).__name__}. Nothing was kept.", "bad")
    return True


def middleware() -> list[Any]:
    """Return what Streamlit puts around its application."""
    from starlette.middleware import Middleware

    return [Middleware(Headers)]
