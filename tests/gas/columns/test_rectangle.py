"""Rectangles of numbers out of texts."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from swarmgauge.gas import InputError
from swarmgauge.gas.columns.rectangle import read_rectangle


@pytest.mark.parametrize(
    "text",
    [
        "1 2.5\n3 4e-2\n",
        "1,2.5\n3,4e-2",
        "1, 2.5\n3, 4e-2\n\n",
        "1;2.5\n3;.04",
        "  1\t2.5\r\n 3 \t 4.D-02\r\n",
    ],
)
def test_ways_to_write_the_same(text):
    found = read_rectangle(text)
    np.testing.assert_array_equal(found.values, [[1.0, 2.5], [3.0, 0.04]])
    assert found.lines.tolist() == [1, 2]


def test_decimal_comma():
    for text in ("0,5;1,2\n2;3,4", "0,5 1,2\n2 3,4"):
        with pytest.raises(InputError, match=r"line 1: is the comma in 0,5 a decimal sign\?"):
            read_rectangle(text)
        np.testing.assert_array_equal(read_rectangle(text, decimal_comma=True).values, [[0.5, 1.2], [2.0, 3.4]])


TWO = "energy sigma\n1 2\n3 4\n\nnext\n5 6\n7 8\n9 10\n"


def test_other_text_is_asked_about_and_never_read():
    with pytest.raises(InputError, match=r'line 1 is not a row of numbers \("energy sigma"\)') as caught:
        read_rectangle(TWO)
    text = str(caught.value)
    assert "lines 2 to 3 hold 2 rows of 2 numbers" in text
    assert "lines 6 to 8 hold 3 rows" in text
    assert text.endswith("as --lines 6-8.")
    assert "\n" not in text


def test_lines():
    assert read_rectangle(TWO, (6, 8)).values[:, 0].tolist() == [5.0, 7.0, 9.0]
    assert read_rectangle("1 2\n\n3 4\n", (1, 3)).lines.tolist() == [1, 3]
    with pytest.raises(InputError, match="line 5 is not"):
        read_rectangle(TWO, (2, 8))
    with pytest.raises(InputError, match="lines 40 to 50 hold no numbers"):
        read_rectangle(TWO, (40, 50))


def test_rows_of_different_lengths_and_blocks():
    with pytest.raises(InputError, match="line 1 alone has 2 numbers; line 2 alone has 3 numbers"):
        read_rectangle("1 2\n3 4 5\n")
    with pytest.raises(InputError, match=r"line 1 alone .*line 3 alone"):  # two tables, perhaps
        read_rectangle("1 2\n\n3 4\n")


@pytest.mark.parametrize("text", ["", "\n \n", "no numbers", "1 nan", "inf 3", "1 2 # three", "1,,3"])
def test_what_is_no_row_of_numbers(text):
    with pytest.raises(InputError):
        read_rectangle(text)


NUMBERS = st.floats(allow_nan=False, allow_infinity=False)


@given(
    st.lists(st.tuples(NUMBERS, NUMBERS, NUMBERS), min_size=1, max_size=8), st.sampled_from([" ", "\t", ",", ";", ", "])
)
@settings(max_examples=60)
def test_numbers_come_back_to_the_last_bit(rows, sign):
    text = "\n".join(sign.join(map(repr, row)) for row in rows)
    np.testing.assert_array_equal(read_rectangle(text).values, np.array(rows))


@given(st.text(alphabet="0123456789.,;-+eE# \t\nabc", max_size=60))
@settings(max_examples=150)
def test_any_text_is_read_or_refused_in_one_line(text):
    try:
        outcome = np.isfinite(read_rectangle(text).values).all()
    except InputError as error:
        outcome = "\n" not in str(error)
    assert outcome
