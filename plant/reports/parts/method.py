"""Method notes: how each number came about, the source of each formula, and which values nobody has verified."""

from __future__ import annotations

from chemistry.sources import SOURCES
from plant.dosing import queries as dosing
from plant.reports.month import Month
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text

KEY, TITLE = "method", "Method notes"
NOT_SEEN = ("from memory", "second-hand")


def section(month: Month) -> Section:
    """General notes; then the steps behind one day of each dosing point with their sources."""
    works = month.works
    blocks: list[Block] = [
        Text(
            f"Operating days start at {works.operating_day_starts} local time ({works.timezone}) and bear the date of "
            "their start; days of "
            "23 and 25 hours are reckoned by elapsed time. A reading not taken exactly at the boundary stands for it "
            "by interpolation "
            "between readings at most 30 hours apart."
        ),
        Text(
            "Used: start + deliveries + transfers in − transfers out − end, over the last measured vessels of a dosing "
            "point, or a weigh "
            "feeder where one is stated. Dose is mass over volume (1 mg/L = 1 kg/ML, by definition). Need: computed "
            "from the day's water by "
            "the need model stated for the point; it is advice to a licensed person. Ranges are ± 2 standard "
            "uncertainties, joined to first "
            "order from stated gauge, strength and meter accuracies (JCGM 100:2008, section 5.1)."
        ),
        Text(
            "Strength always has a basis and a date; where a law of decay is known for the product it runs on from the "
            "certificate or the "
            "last test. Lots in one vessel mix by mass. Totalisers roll over only if the flow this implies is possible."
        ),
    ]
    rows, cited = _steps(month)
    if rows:
        blocks.append(
            Table(
                "method",
                "The steps behind the used, designed and needed dose, for the last known day of each point",
                (
                    Column("Dosing point", number=False),
                    Column("Figure", number=False),
                    Column("Step", number=False, wraps=True),
                    Column("Source", number=False, wraps=True),
                ),
                tuple(rows),
                2,
            )
        )
    unseen = sorted({text for text in cited if any(word in text for word in NOT_SEEN)})
    words = (
        "Sources not opened by anyone, whose values are therefore not verified: " + ". ".join(unseen) + "."
        if unseen
        else "No figure of this report rests on a source that nobody has opened, as far as its steps name their sources."
    )
    blocks.append(Text(words))
    return Section(KEY, TITLE, tuple(blocks))


def _steps(month: Month) -> tuple[list[tuple[Cell, ...]], set[str]]:
    rows: list[tuple[Cell, ...]] = []
    cited: set[str] = set()
    for code in dict.fromkeys(row.dosing_point for row in month.doses):
        known = [row for row in month.doses if row.dosing_point == code and row.used_mg_l.value is not None]
        if not known:
            continue
        row = known[-1]
        for name, figure in (("used", row.used_mg_l), ("need", row.need_mg_l)):
            if figure.value is None or not figure.key:
                continue
            for step in dosing.trail(month.book, figure.key, known=month.ask).steps:
                source = SOURCES.get(step.source, step.source)
                if source:
                    cited.add(source)
                rows.append(
                    (
                        Cell(code),
                        Cell(f"{name}, {month.day_words(row.day)}"),
                        Cell(_step(step.words, step.formula)),
                        Cell(source),
                    )
                )
    return rows, cited


def _step(words: str, formula: str) -> str:
    return f"{words}: {formula}" if formula else words
