"""Values with their units, as long and as short as they are wanted. Pure."""

from diskwatch.units import plain, say_bytes, say_count, say_span

_UNITS = {"celsius": "°C", "percent": "%", "microseconds": "µs", "milliseconds": "ms"}
_STEPS = ((1e15, "P"), (1e12, "T"), (1e9, "G"), (1e6, "M"), (1e3, "k"))


def say_value(value: float | str, unit: str) -> str:
    """A value for a person: ``24 sectors``, ``41 °C``, ``12 TB``, ``3 years``."""
    if isinstance(value, str):
        return plain(value)
    if unit == "bytes":
        return say_bytes(int(value))
    if unit == "hours":
        return f"{say_count(int(value))} h ({say_span(value * 3600)})"
    number = say_count(int(value)) if float(value).is_integer() else f"{value:,.1f}"
    if unit in {"opaque", "word", ""}:
        return number
    return f"{number} {_UNITS.get(unit, plain(unit))}"


def say_mark(value: float, unit: str) -> str:
    """A value for the margin of a picture, at most six letters: ``100``, ``12.3k``, ``1.5M``, ``4 TB``."""
    if unit == "bytes":
        return say_bytes(int(value)).replace(" bytes", " B")[:6]
    for size, letter in _STEPS:
        if abs(value) >= size * 10 or (abs(value) >= size and value % (size / 10) == 0):
            part = value / size
            return f"{part:.3g}{letter}" if part < 999.5 else f"{min(part, 99_999):.0f}{letter}"
    if abs(value) < 0.001:
        return "0"
    return f"{value:.4g}" if abs(value) >= 1 else f"{value:.2g}"
