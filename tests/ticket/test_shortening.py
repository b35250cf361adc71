from diskwatch.ticket.shortening import shortened

DOCUMENT = {
    "schema": "x" * 50,
    "asked_for": "y" * 50,
    "events": [{"text": str(number)} for number in range(9)],
    "findings": [{"data": {str(number): 1 for number in range(9)}} for number in range(9)],
    "ledgers": [{"steps": list(range(50))}],
}


def test_without_limits_nothing_is_cut():
    assert shortened(DOCUMENT, None, None) == DOCUMENT


def test_texts_are_cut_and_lists_keep_what_matters_most():
    told = shortened(DOCUMENT, 10, 3)
    assert told["asked_for"] == "y" * 10 + " [...]"
    assert told["events"] == [{"text": "6"}, {"text": "7"}, {"text": "8"}]
    assert told["findings"] == [{"data": {"0": 1, "1": 1, "2": 1}}] * 3


def test_what_means_nothing_in_part_stays_whole():
    told = shortened(DOCUMENT, 10, 3)
    assert (told["schema"], told["ledgers"]) == (DOCUMENT["schema"], DOCUMENT["ledgers"])
