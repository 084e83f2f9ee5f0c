"""Cuts the web face out of the Inter of fontpkg-inter: ``python -m plant.board.webfont`` writes static/board/inter.woff2.

Run by hand when the face changes (needs fontTools with its ``woff`` extra, brotli); the file it writes is kept with the
software, so that serving pages needs neither. One variable face, weights 400 to 700, for every size on screen.
"""

from __future__ import annotations

import sys
from pathlib import Path

FACE = Path(__file__).parent / "static" / "board" / "inter.woff2"

# Latin with its extensions, Romanian, Greek, Cyrillic, punctuation, super- and subscripts, currency, arrows, operators, shapes.
RANGES = (
    (0x20, 0x7E),
    (0xA0, 0x17F),
    (0x218, 0x21B),
    (0x1E9E, 0x1E9E),
    (0x391, 0x3A9),
    (0x3B1, 0x3C9),
    (0x400, 0x45F),
    (0x2010, 0x2026),
    (0x2030, 0x203A),
    (0x2070, 0x208E),
    (0x20AC, 0x20AC),
    (0x2116, 0x2122),
    (0x2190, 0x2199),
    (0x2202, 0x2265),
    (0x25A0, 0x25CF),
)
FEATURES = ["kern", "calt", "ccmp", "locl", "mark", "tnum", "case", "zero", "subs", "sups"]


def cut(target: Path) -> int:
    """Writes the face; returns its size in bytes."""
    import fontpkg_inter
    from fontTools import subset, ttLib
    from fontTools.varLib import instancer

    font = ttLib.TTFont(Path(fontpkg_inter.__file__).parent / "files" / "Inter[opsz,wght].ttf")
    options = subset.Options(layout_features=FEATURES)
    cutter = subset.Subsetter(options)
    cutter.populate(unicodes=[code for first, last in RANGES for code in range(first, last + 1)])
    cutter.subset(font)
    # Subsetting first: pinning the optical size of the whole font takes ten times as long.
    font = instancer.instantiateVariableFont(font, {"opsz": 14, "wght": (400, 700)})
    font.flavor = "woff2"
    font.save(target)
    return target.stat().st_size


if __name__ == "__main__":
    sys.stdout.write(f"{FACE}: {cut(FACE)} bytes\n")
