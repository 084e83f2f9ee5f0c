"""Codes that change every thirty seconds: TOTP (RFC 6238) over HOTP (RFC 4226). Pure functions."""

from __future__ import annotations

import base64
import hmac
import secrets
from urllib.parse import quote

STEP_S = 30
DIGITS = 6
DRIFT_STEPS = 1
"""Codes of the step before and after count too: clocks of telephones differ, and typing takes time (RFC 6238, 5.2)."""
SECRET_LENGTH = 20
"""Bytes; the length of the hash, as RFC 4226 (section 4, R6) recommends."""


def new_secret() -> bytes:
    """A random secret."""
    return secrets.token_bytes(SECRET_LENGTH)


def hotp(secret: bytes, counter: int, *, digits: int = DIGITS, algorithm: str = "sha1") -> str:
    """The code of a counter (RFC 4226, section 5.3: dynamic truncation)."""
    digest = hmac.digest(secret, counter.to_bytes(8, "big"), algorithm)
    offset = digest[-1] & 0x0F
    number = int.from_bytes(digest[offset : offset + 4], "big") & 0x7FFFFFFF
    return f"{number % 10**digits:0{digits}d}"


def step_at(seconds: float) -> int:
    """The counter at a moment, seconds since 1970 in UTC (RFC 6238, section 4.2, T0 = 0)."""
    return int(seconds // STEP_S)


def matching_step(secret: bytes, code: str, seconds: float, *, after_step: int = -1) -> int | None:
    """The step whose code this is, now or one step before or after; None when it is nobody's.

    Steps up to `after_step` are used up and don't count, so that a code seen over a shoulder works once (RFC 6238, 5.2).
    """
    typed = code.replace(" ", "")
    now = step_at(seconds)
    found = None
    # All are looked at, so that the time taken says nothing.
    for step in range(now - DRIFT_STEPS, now + DRIFT_STEPS + 1):
        if hmac.compare_digest(hotp(secret, step).encode(), typed.encode()) and step > after_step:
            found = step
    return found


def in_base32(secret: bytes) -> str:
    """The secret as people type it into their telephone, in groups of four (RFC 4648 base 32)."""
    text = base64.b32encode(secret).decode().rstrip("=")
    return " ".join(text[start : start + 4] for start in range(0, len(text), 4))


def address(secret: bytes, username: str, issuer: str = "Weirbook") -> str:
    """The address that authenticator programs open to take the secret over (key URI, common practice, no standard)."""
    text = base64.b32encode(secret).decode().rstrip("=")
    label = quote(f"{issuer}:{username}")
    return f"otpauth://totp/{label}?secret={text}&issuer={quote(issuer)}&digits={DIGITS}&period={STEP_S}"
