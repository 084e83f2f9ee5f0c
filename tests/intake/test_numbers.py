"""What was typed for a number."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.intake import numbers


@pytest.mark.parametrize(
    ("typed", "text", "qualifier"),
    [
        ("7.32", "7.32", ""),
        ("7.30", "7.30", ""),
        (" 7.3 ", "7.3", ""),
        ("00500", "500", ""),
        (".5", "0.5", ""),
        ("5.", "5", ""),
        ("-1.3", "-1.3", ""),
        ("−1.3", "-1.3", ""),
        ("<1", "1", "<"),
        ("<1 ", "1", "<"),
        ("< 0.05", "0.05", "<"),
        (">200.5", "200.5", ">"),
        ("1.5E-02", "0.015", ""),
    ],
)
def test_a_number_keeps_its_digits_and_its_qualifier(typed, text, qualifier):
    assert numbers.read(typed) == numbers.Number(text, qualifier, "." in typed)


@pytest.mark.parametrize("typed", ["", " ", "\t"])
def test_nothing_is_nothing(typed):
    assert numbers.read(typed) is None


@pytest.mark.parametrize("typed", ["-", " - ", "–", "—", "--"])
def test_a_lone_dash_is_neither_nothing_nor_a_word(typed):
    found = numbers.read(typed)
    assert isinstance(found, numbers.Words)
    assert found.is_dash


@pytest.mark.parametrize("typed", ["absent", "n/a", "NaN", "#DIV/0!", "not detected", "trace", "ca. 7", "inf"])
def test_words_stay_words(typed):
    assert numbers.read(typed) == numbers.Words(typed)


@pytest.mark.parametrize("typed", ["7,32", "7.3.2", "1,234.5", "1 234", "<", "<abc", "1/2", "1e99", "9" * 41, "??"])
def test_digits_that_would_have_to_be_guessed_are_refused(typed):
    with pytest.raises(numbers.NotANumber):
        numbers.read(typed)


@pytest.mark.parametrize(
    ("typed", "text"), [("7,32", "7.32"), ("<0,05", "0.05"), ("12", "12"), ("0.5", "0.5"), ("0.123", "0.123")]
)
def test_decimal_commas_are_read_where_they_are_expected(typed, text):
    found = numbers.read(typed, decimal=numbers.COMMA)
    assert isinstance(found, numbers.Number)
    assert found.text == text


@pytest.mark.parametrize("typed", ["1.234", "1.234.567", "1.234,5", "1,2,3"])
def test_with_decimal_commas_a_group_of_thousands_is_not_guessed_at(typed):
    with pytest.raises(numbers.NotANumber):
        numbers.read(typed, decimal=numbers.COMMA)


@given(st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**12), max_value=10**12, places=4))
def test_any_decimal_comes_back_as_it_was(value):
    found = numbers.read(format(value, "f"))
    assert isinstance(found, numbers.Number)
    assert found.decimal == value


@given(st.text(max_size=30))
def test_any_text_is_read_or_refused_and_never_breaks(text):
    try:
        found = numbers.read(text)
    except numbers.NotANumber:
        return
    assert found is None or isinstance(found, numbers.Number | numbers.Words)
