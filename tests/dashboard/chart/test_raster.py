import pytest

from diskwatch.dashboard.chart.raster import Dots, Raster


def test_every_dot_of_a_braille_letter_has_its_own_bit():
    seen = set()
    for x in range(2):
        for y in range(4):
            raster = Raster(1, 1, Dots.BRAILLE)
            raster.dot(x, y)
            seen.add(ord(raster.letter(0, 0)) - 0x2800)
    assert sorted(seen) == [1, 2, 4, 8, 16, 32, 64, 128]


@pytest.mark.parametrize(("dots", "letters"), [(Dots.BLOCKS, "▀▄█"), (Dots.ASCII, "'.:")])
def test_halves_stand_above_and_below(dots, letters):
    drawn = []
    for ys in ((0,), (1,), (0, 1)):
        raster = Raster(1, 1, dots)
        for y in ys:
            raster.dot(0, y)
        drawn.append(raster.letter(0, 0))
    assert "".join(drawn) == letters


def test_an_upright_fills_from_either_end_and_what_lies_outside_is_left_out():
    raster = Raster(2, 2, Dots.BLOCKS)
    raster.upright(0, 3, -5)
    raster.upright(7, 0, 3)
    assert [raster.letter(0, 0), raster.letter(0, 1)] == ["█", "█"]
    assert raster.letter(1, 0) == ""
