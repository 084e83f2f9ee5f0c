"""Sealing a file with a key, so that whoever finds the disk with the back-ups can neither read nor alter them.

AES-256-GCM over pieces of one megabyte. Each piece's nonce is a random prefix, the piece's number, and whether it is the
last, so that no piece can be left out, moved or added (the STREAM construction: Hoang, Reyhanitabar, Rogaway and Vizár,
"Online Authenticated-Encryption and its Nonce-Reuse Misuse-Resistance", CRYPTO 2015, from memory). The key of a file comes
from the key file and a random salt by HKDF-SHA256 (RFC 5869).
"""

from __future__ import annotations

import secrets
import struct
from pathlib import Path
from typing import IO

from cryptography.exceptions import InvalidTag
from cryptography.hazmat.primitives.ciphers.aead import AESGCM
from cryptography.hazmat.primitives.hashes import SHA256
from cryptography.hazmat.primitives.kdf.hkdf import HKDF

MARK = b"weirbook sealed 1\n"
PIECE = 1 << 20
SALT_LENGTH, PREFIX_LENGTH, TAG_LENGTH = 32, 7, 16
SHORTEST_KEY = 32


class CannotOpen(ValueError):
    """The wrong key, or a file that was altered or cut; which of them can't be told apart."""


class BadKey(ValueError):
    """A key file that is no good."""


def read_key(path: Path) -> bytes:
    """What the key file holds, without the white space around it. Raises BadKey below 32 characters."""
    try:
        secret = path.read_bytes().strip()
    except OSError as problem:
        raise BadKey(f"the key file {path} can't be read: {problem.strerror}") from None
    if len(secret) < SHORTEST_KEY:
        raise BadKey(f"the key file {path} holds {len(secret)} characters; {SHORTEST_KEY} random ones or more are needed")
    return secret


def new_key() -> str:
    """A key for a key file: 32 random bytes as text."""
    return secrets.token_urlsafe(32)


def is_sealed(path: Path) -> bool:
    """Whether this file was sealed."""
    with path.open("rb") as file:
        return file.read(len(MARK)) == MARK


def seal(source: IO[bytes], target: IO[bytes], secret: bytes) -> None:
    """Writes the source, sealed."""
    salt, prefix = secrets.token_bytes(SALT_LENGTH), secrets.token_bytes(PREFIX_LENGTH)
    target.write(MARK + salt + prefix)
    cipher = _cipher(secret, salt)
    number, piece = 0, source.read(PIECE)
    while True:
        following = source.read(PIECE)
        target.write(cipher.encrypt(_nonce(prefix, number, last=not following), piece, MARK))
        if not following:
            return
        number, piece = number + 1, following


def unseal(source: IO[bytes], target: IO[bytes], secret: bytes) -> None:
    """Writes what was sealed. Raises CannotOpen; what was written by then must not be used."""
    if source.read(len(MARK)) != MARK:
        raise CannotOpen("this file was not sealed by this program")
    salt, prefix = source.read(SALT_LENGTH), source.read(PREFIX_LENGTH)
    cipher = _cipher(secret, salt)
    number, piece = 0, source.read(PIECE + TAG_LENGTH)
    while True:
        following = source.read(PIECE + TAG_LENGTH)
        try:
            target.write(cipher.decrypt(_nonce(prefix, number, last=not following), piece, MARK))
        except (InvalidTag, ValueError):
            raise CannotOpen("the key does not fit, or the file was altered or cut short") from None
        if not following:
            return
        number, piece = number + 1, following


def _cipher(secret: bytes, salt: bytes) -> AESGCM:
    return AESGCM(HKDF(algorithm=SHA256(), length=32, salt=salt, info=b"weirbook back-up").derive(secret))


def _nonce(prefix: bytes, number: int, *, last: bool) -> bytes:
    return prefix + struct.pack(">I?", number, last)
