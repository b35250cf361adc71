"""What two successive values of a counter say."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """The way from one value of a counter to the next.

    Attributes:
        rise: how far it rose, 0 or more, in the counter's unit.
        reset: True where it fell although such a counter cannot: replaced firmware, a wrap, another device.
    """

    rise: int
    reset: bool


def step(old: int, new: int, *, may_fall: bool) -> Step:
    """Compare two successive values of a counter.

    A fall never becomes an increment: nothing is invented for what happened before it, the new value is the
    base for what follows. Counting the fall as quiet is the careful choice (it can only lower evidence).

    Args:
        old: earlier value, in the counter's unit.
        new: later value.
        may_fall: True for counts that fall by nature, such as sectors pending now.
    """
    if new >= old:
        return Step(rise=new - old, reset=False)
    return Step(rise=0, reset=not may_fall)
