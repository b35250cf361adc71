"""The tickets of the rehearsal's drives: one a scenario, of the drive that it is about, on its last day.

    python -m tests.ticket.golden [SCENARIO ...]     draws those of these scenarios, or of all, anew

They are kept so that every later version can be held to what this one wrote: a ticket that somebody has in a
drawer must stay readable. All drives are INVENTED.
"""

import sys
import tempfile
from pathlib import Path
from typing import Any

from diskwatch.history.reader import Past
from diskwatch.ticket.document import About, ticket
from diskwatch.ticket.who import Host
from diskwatch.ticket.writing import text_of
from tests.cli.run import ROOT, run

TICKETS = ROOT / "fixtures" / "tickets"
SCENARIOS = sorted(path.stem for path in (ROOT / "fixtures" / "scenarios").glob("*.toml"))
HOST = Host(name="invented-host", system="Linux", kernel="6.1.0-invented", architecture="x86_64")


def drawn(scenario: str) -> dict[str, Any]:
    """The ticket of the drive with the strongest call at the end of a scenario."""
    with tempfile.TemporaryDirectory() as folder:
        ended = run("rehearse", scenario, "--headless", "--seed", "1", "--state", folder, timeout=600)
        assert ended.code == 0, ended.err
        with Past.open(Path(folder)) as past:
            at = max(line.last_pass.at for line in past.bays(0).every if line.last_pass is not None)
            bays = past.bays(at)
            return ticket(past, bays, bays.every[0].number, About(at=at, host=HOST))


def path_of(scenario: str) -> Path:
    """Where a scenario's ticket is kept."""
    return TICKETS / f"{scenario}.json"


if __name__ == "__main__":
    TICKETS.mkdir(exist_ok=True)
    for name in sys.argv[1:] or SCENARIOS:
        path_of(name).write_text(text_of(drawn(name)), encoding="utf-8")
