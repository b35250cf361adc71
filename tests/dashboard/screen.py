"""A running dashboard as text, and the ways to wait for it: the one place that knows the library's insides."""

from typing import NamedTuple

from textual.app import App
from textual.pilot import Pilot


def text_of(app: App[None]) -> str:
    """What stands on the screen, one line a row, trailing blanks removed."""
    # The library has no public way to read its screen as text.
    return "\n".join(strip.text.rstrip() for strip in app.screen._compositor.render_strips())


def rows_of(app: App[None]) -> list[str]:
    """What stands on the screen, row by row."""
    return text_of(app).split("\n")


class Shade(NamedTuple):
    """Some letters with the red, green and blue of their colour and of what is behind them."""

    text: str
    front: tuple[int, ...]
    back: tuple[int, ...]


def shades_of(app: App[None]) -> list[Shade]:
    """All letters on the screen with their colours; fails where one would get the terminal's own colours."""
    shades = []
    for strip in app.screen._compositor.render_strips():
        for segment in strip:
            if not segment.text.strip():
                continue
            assert segment.style is not None
            assert segment.style.color is not None
            assert segment.style.bgcolor is not None
            front, back = segment.style.color.get_truecolor(), segment.style.bgcolor.get_truecolor()
            shades.append(Shade(segment.text, tuple(front), tuple(back)))
    return shades


def contrast(one: tuple[int, ...], other: tuple[int, ...]) -> float:
    """How much two colours stand out from each other, 1 to 21, by the formula of WCAG 2.2."""
    light, dark = sorted((_luminance(one), _luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def _luminance(colour: tuple[int, ...]) -> float:
    parts = [part / 255 for part in colour]
    bent = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * bent[0] + 0.7152 * bent[1] + 0.0722 * bent[2]


def redraw(app: App[None]) -> None:
    """Make every line anew and lay it on the screen, as the library does when all of them changed."""
    for widget in app.screen.query("Lines"):
        widget.refresh()
    app.screen._on_timer_update()
    app.screen._compositor.render_strips()


async def settled(pilot: Pilot[None]) -> None:
    """Wait until the source has answered and its answer has been drawn."""
    await pilot.app.workers.wait_for_complete()
    await pilot.pause()
    await pilot.pause()
