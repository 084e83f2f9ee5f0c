"""What a document may be. Decided by what it contains, never by what it is called. Pure."""

from __future__ import annotations

import io

from PIL import Image, UnidentifiedImageError

PICTURES = {"JPEG": "image/jpeg", "PNG": "image/png", "WEBP": "image/webp"}
PDF = "application/pdf"
MOST_BYTES = 5_000_000
MOST_PIXELS = 40_000_000
"""More than any camera of a tablet; a picture that claims more is made to fill memory."""


class NotKept(ValueError):
    """Why a document is refused, in words."""


def media_type(content: bytes) -> str:
    """The type of a document of at most 5 MB: JPEG, PNG, WebP or PDF. Raises NotKept."""
    if not content:
        raise NotKept("the file is empty")
    if len(content) > MOST_BYTES:
        raise NotKept(f"the file has {len(content) / 1e6:.1f} MB; at most {MOST_BYTES / 1e6:.0f} MB are kept")
    if content.startswith(b"%PDF-"):
        return PDF
    try:
        with Image.open(io.BytesIO(content), formats=list(PICTURES)) as picture:
            if picture.width * picture.height > MOST_PIXELS:
                raise NotKept(f"the picture has {picture.width} × {picture.height} points; that is too many")
            kind = PICTURES[picture.format or ""]
            picture.verify()
    except (UnidentifiedImageError, Image.DecompressionBombError, OSError, SyntaxError, KeyError, ValueError) as problem:
        if isinstance(problem, NotKept):
            raise
        raise NotKept("the file is no JPEG, PNG, WebP or PDF that can be read") from None
    return kind
