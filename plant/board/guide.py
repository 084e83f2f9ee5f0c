"""The pages of the help, in the order in which they are listed."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Topic:
    """One short page; its words are in templates/help/<slug>.html."""

    slug: str
    title: str
    about: str


@dataclass(frozen=True)
class Group:
    title: str
    topics: tuple[Topic, ...]


GROUPS = (
    Group(
        "What you come for",
        (
            Topic("operator", "The operator", "the round, what to do with an answer, handing over"),
            Topic("supervisor", "The supervisor", "what deviates, why, who has it; settling and correcting"),
            Topic("manager", "The manager", "the month, the stock, and signing"),
            Topic("inspector", "The inspector", "issued reports, and the trail behind a figure"),
            Topic("administrator", "The administrator", "people, settings, bringing records in"),
        ),
    ),
    Group(
        "The screens",
        (
            Topic("board", "Board", "is anything wrong?"),
            Topic("round", "Round", "entering a shift’s values"),
            Topic("deviations", "Deviations", "from raised to closed"),
            Topic("dosing", "Dosing point", "used, designed, needed"),
            Topic("stock", "Stock", "what is there, how long it lasts, when to order"),
            Topic("readings", "Readings", "finding, correcting, settling"),
            Topic("month", "Month", "preparing, certifying, issuing, revising"),
            Topic("import", "Import", "records, deliveries and transfers from files"),
            Topic("settings", "Settings", "what is in force, and how to change it"),
            Topic("devices", "Devices", "readings sent by machines, and what machines may read"),
        ),
    ),
    Group(
        "Before you rely on it",
        (
            Topic("cautions", "Cautions", "chemicals, and what this software is not"),
            Topic("numbers", "Where the numbers come from", "dose, need, uncertainty, stock"),
        ),
    ),
)
TOPICS = {topic.slug: topic for group in GROUPS for topic in group.topics}
