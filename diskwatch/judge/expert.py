"""A finding in one line for an expert: the rule and its version, raw signal names, values, M, parameters.

Nothing of it is translated: names are those of the JSON, so that both can be held against each other.
"""

from collections.abc import Iterator, Mapping

from diskwatch.judge.rulebook import rule_of
from diskwatch.records import Finding
from diskwatch.trends.norms import NORMS

_TOLD_ELSEWHERE = frozenset({"stream", "signal", "threshold"})
_DIGITS = 6


def expert_line(finding: Finding) -> str:
    """The line; texts in it that come from a drive are not escaped yet.

    Args:
        finding: one that stands.
    """
    return "; ".join(_parts(finding))


def _parts(finding: Finding) -> Iterator[str]:
    yield f"{finding.name}/{rule_of(finding.name).version}"
    if finding.signals:
        yield f"signals {', '.join(finding.signals)}"
    if "signal" in finding.data and len(finding.signals) > 1:
        yield f"last to rise {finding.data['signal']}"
    if finding.evidence is not None:
        threshold = finding.data.get("threshold")
        limit = "" if threshold is None else f" of {_shown(threshold)}"
        yield f"M {_shown(finding.evidence)}{limit} d"
    yield from (
        f"{name} {_shown(value)}" for name, value in finding.data.items() if name not in _TOLD_ELSEWHERE
    )
    norm = next((one for one in NORMS if finding.name == f"drift:{one.stream}"), None)
    if norm is not None:
        yield f"norm {_shown(norm.per_year)}/y"
        yield f"share {_shown(norm.share)}"


def _shown(value: object) -> str:
    if value is None:
        return "not known"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.{_DIGITS}g}"
    if isinstance(value, Mapping):
        return " ".join(f"{name} {_shown(one)}" for name, one in value.items())
    if isinstance(value, list | tuple):
        return ", ".join(_shown(one) for one in value)
    return str(value)
