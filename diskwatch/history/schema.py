"""The tables of the history, as numbered steps that only ever go forward.

What shaped them: ten years of six drives must stay small, few bytes may be written a day, and every question
must be answered quickly.

* A page of 4 KiB is the least that SQLite writes, so what a round writes lies close together: values of today
  stand in ``fresh`` in order of time, and the first round of a new day files them into ``value`` in order of
  series, where a long range of one series reads at once. Evidence goes the same way, from ``latest`` into
  ``evidence``.
* Values are stored on change and every pass is stored, so "no change" is knowledge.
* What is thinned, and when, stands in one table: `diskwatch.history.keeping`.
* ``latest`` holds what every signal is now; no question about now walks through the past.
* Explanations of passes repeat for months: each stands once in ``sentence``.
* Whole numbers of up to 63 bits are INTEGER. NVMe counters have 128 bits; what is larger is kept as its decimal
  digits in a BLOB, which tells it from a word by its type alone. Names that UTF-8 cannot carry are kept as
  bytes likewise. Hence the columns of type ANY.
* Times are UTC seconds since 1970, days count from 1970-01-01.
"""

from collections.abc import Callable

from diskwatch.history.library import Database, Migrations
from diskwatch.history.steps import (
    answer,
    base,
    every_pass,
    in_order,
    listening,
    probe,
    ten_years,
    trends,
    ways,
)
from diskwatch.history.versions import MIGRATION_SET, MIGRATIONS

STATEMENTS = {
    "0001_base": base.STATEMENTS,
    "0002_ten_years": ten_years.STATEMENTS,
    "0003_every_pass": every_pass.STATEMENTS,
    "0004_in_order": in_order.STATEMENTS,
    "0005_ways": ways.STATEMENTS,
    "0006_answer": answer.STATEMENTS,
    "0007_listening": listening.STATEMENTS,
    "0008_trends": trends.STATEMENTS,
    "0009_probe": probe.STATEMENTS,
}
"""What each step does, by its name in `diskwatch.history.versions`."""

steps = Migrations(MIGRATION_SET)


def _taking(name: str, number: int) -> Callable[[Database], None]:
    def take(db: Database) -> None:
        for statement in STATEMENTS[name]:
            db.conn.execute(statement)
        db.conn.execute(f"PRAGMA user_version = {number}")

    return take


for _number, _name in enumerate(MIGRATIONS, start=1):
    steps(name=_name)(_taking(_name, _number))


def bring_up_to_date(db: Database) -> None:
    """Apply the steps that a history lacks, all of them or none.

    Raises:
        sqlite3.Error: a step failed; the history is as it was.
    """
    with db.atomic():
        steps.apply(db)
