"""What is asked of whoever gets a ticket, in one sentence, from the call and its cause."""

from collections.abc import Mapping

from diskwatch.language import _, marked
from diskwatch.records import CallWord, Cause

_TEST = marked(
    "Please run an extended self-test of this drive, and say whether its warranty covers what that shows."
)
_ASKED: Mapping[CallWord, Mapping[Cause, str]] = {
    CallWord.RETIRE: {
        Cause.MEDIA: marked(
            "Please replace this drive: it loses stored data, and it is to be taken out of service now."
        ),
        Cause.HEAD: marked(
            "Please replace this drive: a head reads badly, and it is to be taken out of service now."
        ),
        Cause.SPARE: marked(
            "Please replace this drive: its spare blocks are used up, and it is to be taken out of service now."
        ),
        Cause.WEAR_OUT: marked(
            "Please replace this drive: it is worn out, and it is to be taken out of service now."
        ),
        Cause.CONTROLLER: marked(
            "Please replace this drive: its electronics failed, and it is to be taken out of service now."
        ),
    },
    CallWord.COPY: {
        Cause.MEDIA: marked("Please replace this drive once its data are copied off: it loses stored data."),
        Cause.HEAD: marked("Please replace this drive once its data are copied off: a head reads badly."),
        Cause.SPARE: marked(
            "Please replace this drive once its data are copied off: its spare blocks run out."
        ),
        Cause.WEAR_OUT: marked(
            "Please replace this drive once its data are copied off: it is past its rated endurance."
        ),
    },
    CallWord.LOOK: {
        Cause.LINK: marked(
            "No new drive is asked for: please check or replace the cable, the connector or the port."
        ),
        Cause.POWER: marked("No new drive is asked for: please check the power supply and its connectors."),
        Cause.HEAT: marked("No new drive is asked for: please check the fan, the air flow and the room."),
        Cause.LOAD: marked("No new drive is asked for: please look at what keeps this machine busy."),
        Cause.CONTROLLER: marked(
            "Please check the controller, its firmware and the port before the drive is blamed."
        ),
        Cause.MEDIA: _TEST,
        Cause.HEAD: _TEST,
        Cause.WEAR_OUT: marked("Please plan a new drive: this one is at the end of its rated endurance."),
        Cause.SPARE: marked("Please plan a new drive: this one uses up its spare blocks."),
    },
}
_OTHERWISE: Mapping[CallWord, str] = {
    CallWord.RETIRE: marked("Please replace this drive: it is to be taken out of service now."),
    CallWord.COPY: marked("Please replace this drive once its data are copied off."),
    CallWord.LOOK: marked(
        "Please look at this drive and at what it is plugged into: the cause is not clear yet."
    ),
    CallWord.KEEP: marked("Nothing is asked for: this is a record of what was seen of the drive."),
}
UNREAD = marked("Please help to read this drive: it has given no reading yet, so nothing can be said of it.")


def asked_for(word: CallWord | None, cause: Cause | None) -> str:
    """The sentence.

    Args:
        word: the call; None for a drive that has not been read.
        cause: what best explains it, or None.
    """
    if word is None:
        return _(UNREAD)
    own = None if cause is None else _ASKED.get(word, {}).get(cause)
    return _(own or _OTHERWISE[word])
