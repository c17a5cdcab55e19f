import pytest
from matplotlib import font_manager
from matplotlib.ft2font import FT2Font, LoadFlags

from cornerwise.render.figures.lettering import embedded_font, fitted, in_lines, sized, width_of
from cornerwise.render.figures.style import FONT


@pytest.mark.parametrize("text", ["E154Q/R223Q", "median voltage of WT (12 cells)", "−9.19 ± 0.32", "a → b…"])
def test_widths_are_those_of_the_font(text: str) -> None:
    font = FT2Font(font_manager.findfont(FONT))
    font.set_size(100.0, 72.0)
    wide = sum(font.load_char(ord(letter), flags=LoadFlags.NO_HINTING).linearHoriAdvance for letter in text)
    assert width_of(text, 100.0) == pytest.approx(wide / 65536 / 72 * 25.4, rel=0.02)


def test_text_is_made_smaller_before_it_is_cut() -> None:
    room = width_of("D171N/F188A/K232Q", 7.0) * 0.9
    text, size = sized("D171N/F188A/K232Q", 7.0, room)
    assert text == "D171N/F188A/K232Q"
    assert 5.0 <= size < 7.0
    assert width_of(text, size) <= room + 1e-6
    text, size = sized("D171N/F188A/K232Q", 7.0, room / 2)
    assert size == 5.0
    assert text.endswith("…")
    assert width_of(text, size) <= room / 2


def test_fitting_text_is_left_alone() -> None:
    assert fitted("abc", 7.0, 100.0) == "abc"


def test_lines_hold_all_words_and_fit() -> None:
    text = "the two shaded areas on either side of it are equal"
    lines = in_lines(text, 6.0, 30.0)
    assert " ".join(lines) == text
    assert len(lines) > 1
    assert all(width_of(line, 6.0) <= 30.0 for line in lines)


def test_the_font_comes_along_with_unusual_letters_only_when_used() -> None:
    plain, greek = embedded_font("abc"), embedded_font("abcΩ")
    assert plain.startswith("@font-face")
    assert len(greek) > len(plain)
    assert embedded_font("abc") == plain
