"""A drive's life for tests of the analyser."""

from diskwatch import analyser


def lived(*passes, state=None):
    """All steps of a drive's life."""
    steps = []
    state = state or analyser.start()
    for one in passes:
        steps.append(analyser.advance(state, one))
        state = steps[-1].state
    return steps


def kinds(step):
    """What the day book hears of a step."""
    return [entry.kind for entry in step.happened]
