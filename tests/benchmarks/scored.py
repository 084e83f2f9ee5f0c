"""How well deviations are found: the whole table, over simulated works of a year each.

Each works goes through files and commands as from outside (works file, records, deliveries, `review`, `deviations`) and is scored
against its truth, beside two simpler rules on the same days. Rules and thresholds were chosen on seeds 101 to 150; 901 to 920
were scored once before the last choice (that the dose and its answer share the accepted false alarms); the default seeds
were used for no choice. About a minute a works.

Days count from the operating day on which an incident began to the operating day a deviation was raised for. A round a few minutes
past the start of a day closes the day before, so what a day's dose shows at once counts as one day, not as none.

    python tests/benchmarks/scored.py [first seed] [works] [days]      (default: 921 20 365)
"""

from __future__ import annotations

import os
import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
FOLDER = Path(tempfile.mkdtemp(prefix="weirbook-benchmark-"))
os.environ["WEIRBOOK_DATA"] = str(FOLDER)
os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.development")
os.environ.pop("DATABASE_URL", None)

import django  # noqa: E402

django.setup()

from django.core.management import call_command  # noqa: E402

from tests.deviations import scoring, trial  # noqa: E402
from tests.deviations.scoring import Score  # noqa: E402


def main() -> None:
    first, works, days = (int(text) for text in (sys.argv[1:] + ["921", "20", "365"][len(sys.argv) - 1 :])[:3])
    call_command("migrate", verbosity=0)
    total: dict[str, Score] = {}
    for seed in range(first, first + works):
        for name, item in trial.scores(seed, days, FOLDER / str(seed)).items():
            total[name] = total.get(name, Score()) + item
        print(f"{seed}: {total['program'].recall():.2f} found so far", file=sys.stderr, flush=True)
    print(f"seeds {first} to {first + works - 1}, {days} days each; false alarms per dosing point and 90 days")
    print("\n".join(scoring.rows(list(total.items()))))
    for what in scoring.WHATS:
        chosen = total["program"].of(what)
        found = [item for item in chosen if item.days is not None]
        true = sum(item.incident.cause in item.causes[:1] for item in found)
        print(
            f"{what:18} {len(found)} of {len(chosen)} found, median {total['program'].median_days(what)} days, cause first {true}"
        )


if __name__ == "__main__":
    main()
