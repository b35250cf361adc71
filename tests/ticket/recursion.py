"""The published recursion, written anew from the words of the schema and from nothing else of the house."""

import math


def evidence(ledger, way):
    """M after the last step of a way, in days."""
    total = list(way["sums"])
    open_ = {
        "exposure": way["exposure"],
        "absorbing": way["absorbing"],
        "decided": way["decided"],
        "opened": way["opened"],
    }
    for step in way["steps"]:
        for _ in range(step["days"]):
            if step["exposure"] is not None:
                total, absorbing = _closed(ledger, total, open_)
                open_ = {
                    "exposure": step["exposure"],
                    "absorbing": absorbing,
                    "decided": False,
                    "opened": False,
                }
            if step["rose"]:
                total = _rise(ledger, total, open_)
    return math.fsum(total) / len(total)


def _closed(ledger, total, open_):
    absorbed = min(open_["absorbing"], open_["exposure"])
    counted = open_["exposure"] - absorbed
    if not open_["decided"] and counted > 0:
        quiet = [math.exp(-(ratio - 1) * ledger["norm_per_day"] * counted) for ratio in ledger["ratios"]]
        total = [min(ledger["cap"], (one + counted) * factor) for one, factor in zip(total, quiet, strict=True)]
    return total, ledger["absorbed_days"] if open_["opened"] else open_["absorbing"] - absorbed


def _rise(ledger, total, open_):
    if open_["decided"]:
        return total
    if open_["absorbing"] > 0:
        open_["decided"] = open_["exposure"] > open_["absorbing"]
        return total
    rate = ledger["norm_per_day"] * open_["exposure"]
    factors = [(1 - math.exp(-ratio * rate)) / (1 - math.exp(-rate)) for ratio in ledger["ratios"]]
    open_["decided"] = open_["opened"] = True
    return [
        min(ledger["cap"], (one + open_["exposure"]) * factor)
        for one, factor in zip(total, factors, strict=True)
    ]
