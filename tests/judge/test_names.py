from diskwatch.judge.names import begun, counted, happened, signal_name
from diskwatch.trends.norms import NORMS


def test_every_stream_and_each_of_its_counters_has_words():
    for norm in NORMS:
        assert " " in happened(norm.stream)
        for signal in norm.signals:
            assert signal_name(signal) != signal.replace("-", " ")
            assert signal_name(signal, 1) != signal_name(signal, 2)


def test_a_signal_without_words_of_its_own_is_named_by_the_trades_term():
    assert signal_name("spin-retries") == "spin retries"


def test_counts_stand_in_a_row_each_in_its_number():
    told = counted({"pending-sectors": 1, "crc-errors": 1265})
    assert told == (
        "1 sector that could not be read and waits (pending), "
        "1,265 transfers damaged on the cable or connector (interface CRC errors)"
    )


def test_a_sentence_begins_with_a_capital():
    assert begun("reset of the link") == "Reset of the link"
