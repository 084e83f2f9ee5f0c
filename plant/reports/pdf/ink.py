"""Colours and sizes of the printed page. Nothing is told by colour alone: the page must hold when printed in grey."""

from __future__ import annotations

from reportlab.lib.colors import HexColor

INK = HexColor("#10222B")
QUIET = HexColor("#4A5B64")
WATER = HexColor("#0A5A86")
LINE = HexColor("#9FB0B6")
HAIR = HexColor("#D5DDDF")
STRIPE = HexColor("#F1F5F6")
BAND = HexColor("#D3E6EE")

BODY = 9.0
SMALL = 7.6
CELL = 7.4
HEAD = 7.0
H1 = 26.0
H2 = 14.0
H3 = 9.6
LEADING = 1.34
