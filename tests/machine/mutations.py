"""Answers as a broken tool, a dying drive or another locale may give them."""

import random
import re

from diskwatch.machine.text import decoded

NOISE = "0123456789 :=.,-+\t\x00\x1b\x9b\u202e[]()#%/xXhn"


_APART = (".", "'", "\u2019", " ", "\u00a0", "\u202f", "\u00ff", "\ufffd", "")
_DIGITS = str.maketrans("0123456789", "\u0660\u0661\u0662\u0663\u0664\u0665\u0666\u0667\u0668\u0669")


def localised(text: str, dice: random.Random) -> str:
    """An answer as another locale has it: thousands set apart otherwise, decimal commas, other digits."""
    kind = dice.randrange(3)
    if kind == 0:
        return re.sub(r"(?<=[0-9]),(?=[0-9]{3})", dice.choice(_APART), text)
    if kind == 1:
        return re.sub(r"(?<=[0-9])[.](?=[0-9])", ",", text)
    return text.translate(_DIGITS)


def flipped(text: str, dice: random.Random) -> str:
    """An answer with some of its bits turned over, as bytes, and read as what it is then."""
    output = bytearray(text.encode("utf-8"))
    for _ in range(dice.randint(1, 8)):
        if output:
            output[dice.randrange(len(output))] ^= 1 << dice.randrange(8)
    return decoded(bytes(output))


def mutated(text: str, dice: random.Random) -> str:
    """An answer as a broken tool, a dying drive or another locale may give it."""
    how = dice.randrange(8)
    if how < 2:
        text = (localised, flipped)[how](text, dice)
        if dice.random() < 0.5:
            return text
    lines = text.split("\n")
    for _ in range(dice.randint(1, 6)):
        kind = dice.randrange(6)
        spot = dice.randrange(len(lines))
        letters = lines[spot]
        at = dice.randrange(len(letters) + 1)
        if kind == 0:
            lines = lines[: spot + 1]
            lines[-1] = letters[:at]
        elif kind == 1:
            lines.insert(dice.randrange(len(lines)), letters)
        elif kind == 2:
            del lines[spot]
            lines = lines or [""]
        elif kind == 3:
            lines[spot] = letters[:at] + dice.choice(NOISE) + letters[at + 1 :]
        elif kind == 4:
            lines[spot] = letters[:at] + dice.choice(NOISE) * dice.randint(1, 3) + letters[at:]
        else:
            lines[spot] = letters[:at] + letters[at + dice.randint(1, 5) :]
    return "\n".join(lines)
