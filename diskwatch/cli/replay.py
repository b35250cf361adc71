"""Recorded readings through the same analyser: what it would have said, and when.

FILE is a table in CSV, also packed (.csv.gz), in one of three layouts, known by its first line. One row a day:
  day, serial, model, bytes, a<id>_raw, a<id>_norm, and where there are any: failed, percentage_used,
      available_spare, media_errors, data_written (bytes), unsafe_power_offs, critical_warning, temperature
  date, serial_number, model, capacity_bytes, failure, smart_<id>_raw, smart_<id>_normalized
or one row a drive and interval, with what the kernel counted in it, from which slower reads and writes show:
  time (RFC 3339 or seconds since 1970; the interval's end), serial, interval_s, reads, writes, read_bytes,
      write_bytes, read_ms, write_ms, busy_ms
A drive failed when any of its rows says so. Rows that cannot be understood are named and left out.
"""

import argparse
import sys
from pathlib import Path

from diskwatch.cli.answers import replay_answer
from diskwatch.cli.common import Bar, print_json, settings, talk
from diskwatch.errors import UsageError
from diskwatch.records import CallWord, ReplayedDrive, ReplaySummary, summed
from diskwatch.replay import replay
from diskwatch.units import plain, rfc3339


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("files", metavar="FILE", nargs="+", type=Path, help="tables of readings or traffic")
    parser.add_argument("--json", action="store_true", help="one JSON object")
    parser.add_argument("--jobs", metavar="N", type=int, default=1, help="processes to share the drives out to")


def run(args: argparse.Namespace) -> int:
    """Replay; 0, also where rows were skipped."""
    if args.settings is not None:
        settings(args)
    if not 1 <= args.jobs <= 64:
        raise UsageError(f"--jobs {args.jobs} is out of range", hint="name a number from 1 to 64")
    with Bar("replaying") as bar:
        part = replay(args.files, jobs=args.jobs, progress=bar.show)
    for sentence in part.told:
        talk(f"diskwatch: {sentence}")
    summary = summed(part.drives, skipped=part.skipped)
    if args.json:
        print_json(replay_answer(part.drives, summary))
    else:
        sys.stdout.write("".join(f"{plain(line)}\n" for line in _told(part.drives, summary)))
    return 0


def _told(drives: tuple[ReplayedDrive, ...], summary: ReplaySummary) -> list[str]:
    """Every drive that was more than kept, worst first, and the sum of it all."""
    spoken = [drive for drive in drives if drive.worst not in {None, CallWord.KEEP}]
    spoken.sort(key=lambda drive: (-(drive.worst or CallWord.KEEP).rank, drive.serial))
    lines = [line for drive in spoken for line in _life(drive)]
    lead = "-" if summary.median_lead_days is None else f"{summary.median_lead_days:g} days"
    warned = f"{summary.warned_failed} of those that failed, {summary.warned_sound} others"
    return [
        *lines,
        f"{summary.drives} drives over {summary.drive_days} days of readings; {summary.failed} failed.",
        f"Warned (copy or retire): {warned}; median lead {lead}.",
        f"{summary.skipped} rows were skipped.",
    ]


def _life(drive: ReplayedDrive) -> list[str]:
    fate = f"failed {rfc3339(drive.last)[:10]}" if drive.failed else f"seen until {rfc3339(drive.last)[:10]}"
    return [
        f"{drive.serial}, {drive.model or 'model not recorded'}, {fate}",
        *(f"  {rfc3339(call.at)[:10]}  {call.word.value:<6}  {call.reason}" for call in drive.calls),
    ]
