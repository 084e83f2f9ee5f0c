"""Cuts the two static faces in ``faces/`` from the variable Inter of fontpkg-inter. Run by hand when Inter changes:

    python -m plant.reports.pdf.cut_faces [FOLDER]

The faces are kept beside this file, so that the same report has the same bytes whatever fonttools is installed. Inter is
under the SIL Open Font License 1.1 without a reserved font name; its text lies in ``faces/OFL.txt``.
"""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path

from fontTools import subset
from fontTools.ttLib import TTFont
from fontTools.varLib import instancer

WEIGHTS = {"Regular": 400, "SemiBold": 640}
TEXT_SIZE = 14  # the optical size cut for small print
RANGES = ((0x20, 0x7F), (0xA0, 0x250), (0x370, 0x530), (0x1E00, 0x2000), (0x2010, 0x2040), (0x2070, 0x20A0))
SINGLES = (
    0x20AC,
    0x2103,
    0x2109,
    0x2116,
    0x2122,
    0x2126,
    0x2190,
    0x2191,
    0x2192,
    0x2193,
    0x2206,
    0x2211,
    0x2212,
    0x2215,
    0x221A,
    0x2248,
    0x2260,
    0x2264,
    0x2265,
    0x25A0,
    0x25A1,
    0x25B2,
    0x25BC,
    0x25C6,
    0x25CB,
    0x25CF,
    0x2713,
    0x2717,
)
TABULAR = "0123456789+−"


def cut(folder: Path) -> dict[str, Path]:
    """Writes Inter-Regular.ttf and Inter-SemiBold.ttf into ``folder``; the same bytes each time."""
    spec = importlib.util.find_spec("fontpkg_inter")
    if spec is None or not spec.submodule_search_locations:
        raise FileNotFoundError("fontpkg-inter is not installed")
    source = Path(spec.submodule_search_locations[0]) / "files" / "Inter[opsz,wght].ttf"
    return {name: _one(source, name, weight, folder) for name, weight in WEIGHTS.items()}


def _one(source: Path, name: str, weight: int, folder: Path) -> Path:
    whole = TTFont(source, lazy=True, recalcTimestamp=False)
    _figures_of_one_width(whole)
    options = subset.Options()
    options.layout_features = []
    options.hinting = False
    options.notdef_outline = True
    options.name_IDs = ["*"]
    cutter = subset.Subsetter(options)
    # Subsetting first: instancing the whole font takes ten times as long.
    cutter.populate(unicodes=[code for low, high in RANGES for code in range(low, high)] + list(SINGLES))
    cutter.subset(whole)
    font = instancer.instantiateVariableFont(whole, {"wght": weight, "opsz": TEXT_SIZE})
    for record in font["name"].names:
        # Two faces of one PostScript name would be embedded as one.
        if record.nameID == 6:
            record.string = f"Inter-{name}"
        elif record.nameID == 4:
            record.string = f"Inter {name}"
    path = folder / f"Inter-{name}.ttf"
    font.save(path)
    font.close()
    whole.close()
    return path


def _figures_of_one_width(font: TTFont) -> None:
    """Points the digits at their tabular forms: the PDF writer knows no font features."""
    table = font["GSUB"].table
    wanted = next(record.Feature for record in table.FeatureList.FeatureRecord if record.FeatureTag == "tnum")
    swaps: dict[str, str] = {}
    for index in wanted.LookupListIndex:
        for part in table.LookupList.Lookup[index].SubTable:
            swaps.update(getattr(part, "ExtSubTable", part).mapping)
    for names in (part.cmap for part in font["cmap"].tables if part.isUnicode()):
        for character in TABULAR:
            if names.get(ord(character)) in swaps:
                names[ord(character)] = swaps[names[ord(character)]]


if __name__ == "__main__":
    cut(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent / "faces")
