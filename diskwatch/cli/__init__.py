"""The command line: parse, call, print; the only place that joins all rooms."""


def main() -> int:
    """Run the command line; returns the exit code."""
    return 2
