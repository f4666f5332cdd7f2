"""Figures as people write them: what is read, what is refused and how that is told."""

from __future__ import annotations

from decimal import Decimal
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.rules.figures import Number, Percent, Share, Whole, percent_text
from hedgerow.rules.words import Loose, Scalar, WordsError


def refused(scalar: Scalar, value: object) -> Loose:
    """The one fault with which a scalar refuses a value."""
    with pytest.raises(WordsError) as caught:
        scalar.read(value)
    assert len(caught.value.faults) == 1
    return caught.value.faults[0]


@pytest.mark.parametrize(
    ("text", "fraction"),
    [
        ("2%", 0.02),
        ("-4%", -0.04),
        ("+3%", 0.03),
        ("0%", 0.0),
        ("-0%", 0.0),
        ("0.5%", 0.005),
        (".5%", 0.005),
        ("7.%", 0.07),
        ("33.33%", 0.3333),
        ("100 %", 1.0),
        ("007%", 0.07),
    ],
)
def test_percent_reads_as_its_fraction(text: str, fraction: float) -> None:
    """Compares with the fraction worked out by hand, to the last bit: a hundredth of the decimal number."""
    assert Percent(-1.0, 1.0).read(text) == fraction
    assert str(Percent(-1.0, 1.0).read(text)) == str(fraction)


@pytest.mark.parametrize("value", ["2", "-4", "0.05", "1e1", 2, 0.02, "0"])
def test_bare_number_is_no_percent(value: object) -> None:
    """A percent without its sign is refused, and the remedy writes it with one."""
    fault = refused(Percent(-1.0, 1.0), value)
    assert fault.code == "percent"
    assert "a bare number" in fault.found
    assert fault.remedy == f"write {value}%"


@pytest.mark.parametrize(
    "value",
    ["12:30", "two percent", "NO", "", None, True, "2%%", "%", "1_0%", "nan%", "1e1%", "- 4%", ["2%"], {}],
)
def test_what_is_no_percent(value: object) -> None:
    """Text, times, flags, nothing, lists: each is refused as no percent and told what is allowed."""
    fault = refused(Percent(-1.0, 1.0), value)
    assert fault.code == "percent"
    assert "no percent" in fault.found
    assert fault.allowed == "allowed: a percent from -100% to 100%, written with its % sign"


@pytest.mark.parametrize(
    ("text", "open_ends", "fine"), [("5%", False, True), ("5%", True, False), ("5.1%", False, False)]
)
def test_ends_of_a_range(text: str, open_ends: bool, fine: bool) -> None:
    """The end of a closed range is allowed, that of an open one is not, and beyond is out of range."""
    scalar = Percent(0.01, 0.05, open_ends)
    if fine:
        assert scalar.read(text) == 0.05
    else:
        assert refused(scalar, text).code == "range"


@given(st.decimals(-900, 900, places=4, allow_nan=False))
def test_percent_survives_writing(percent: Decimal) -> None:
    """Compares a percent with itself after it was read, written and read again: the same bits."""
    scalar = Percent(-10.0, 10.0)
    fraction = scalar.read(f"{percent}%")
    assert scalar.read(scalar.write(fraction)) == fraction
    assert fraction == float(Fraction(percent) / 100)


@given(st.floats(-5, 5))
def test_any_fraction_survives_writing(fraction: float) -> None:
    """Compares any double with what its percent reads as: every digit is kept."""
    assert Percent(-10.0, 10.0).read(percent_text(fraction)) == fraction


@pytest.mark.parametrize(("value", "number"), [("7", 7), (7, 7), ("-3", -3), ("+3", 3), ("007", 7)])
def test_whole_number(value: object, number: int) -> None:
    """Compares text and Python numbers with the number by hand."""
    read = Whole(-10, 10).read(value)
    assert (read, type(read)) == (number, int)


@pytest.mark.parametrize(
    "value", ["7.0", 7.0, "1e1", "seven", True, "", None, "0x7", "1_0", "7%", "12:30", [7]]
)
def test_no_whole_number(value: object) -> None:
    """Halves, flags, hexadecimal and the rest are refused."""
    fault = refused(Whole(1, 1100, "calendar days"), value)
    assert fault.code == "whole"
    assert fault.allowed == "allowed: a whole number from 1 to 1100 (calendar days)"


@pytest.mark.parametrize("value", ["0", 0, "1101", 10**17, "-5"])
def test_whole_number_out_of_range(value: object) -> None:
    """A number beyond either end is told with the range."""
    assert refused(Whole(1, 1100), value).code == "range"


@pytest.mark.parametrize(
    ("value", "number"), [("0.35", 0.35), (".5", 0.5), (1, 1.0), ("1e-1", 0.1), ("-2", -2.0)]
)
def test_number(value: object, number: float) -> None:
    """Compares with Python's own reading of the decimal text."""
    assert Number(-5, 5).read(value) == number


@pytest.mark.parametrize("value", ["nan", "inf", "-inf", float("nan"), float("inf"), "1e999", 10**400])
def test_numbers_that_are_none(value: object) -> None:
    """What is not finite never gets in, as text or as a Python number."""
    assert refused(Number(-1e308, 1e308), value).code in ("number", "range")


def test_percent_where_a_number_is_wanted() -> None:
    """The remedy for a sign too many."""
    fault = refused(Number(0, 1, "absolute delta", open_ends=True), "35%")
    assert fault.remedy == "leave the % sign out"
    assert fault.allowed == "allowed: a number above 0 and below 1 (absolute delta)"


@given(st.floats(-1e6, 1e6))
def test_number_survives_writing(number: float) -> None:
    """Compares any double with what it reads as after writing; whole ones are written without a point."""
    scalar = Number(-1e6, 1e6)
    written = scalar.write(number)
    assert scalar.read(written) == number
    assert scalar.read(str(written)) == number
    assert isinstance(written, int) == number.is_integer()


@pytest.mark.parametrize(
    ("value", "share"),
    [("1/3", 1 / 3), ("1 / 4", 0.25), ("2/3", 2 / 3), ("25%", 0.25), ("1/1", 1.0), ("100%", 1.0)],
)
def test_share_of_a_whole(value: str, share: float) -> None:
    """Compares fractions and percents with the division by hand, and with themselves after writing."""
    assert Share().read(value) == share
    assert Share().read(Share().write(share)) == share


@pytest.mark.parametrize(
    "value", ["0%", "0/3", "3/0", "4/3", "101%", "0.25", "a third", 0.3, True, "", None, "1/-3"]
)
def test_no_share_of_a_whole(value: object) -> None:
    """Nothing, more than all, a division by nothing, and bare numbers are refused."""
    fault = refused(Share(), value)
    assert fault.code in ("share", "range")
    assert "1/3" in fault.allowed


@given(st.integers(1, 900))
def test_shares_are_written_as_fractions(parts: int) -> None:
    """One over a whole number is written with a bar, since its percent would have no end."""
    assert Share().write(1 / parts) == f"1/{parts}"


@pytest.mark.parametrize(
    ("scalar", "kind"),
    [(Percent(0, 1), "string"), (Whole(0, 1), "integer"), (Number(0, 1), "number"), (Share(), "string")],
)
def test_what_an_editor_checks(scalar: Scalar, kind: str) -> None:
    """The JSON type of each figure: percents and shares are text, since they carry a sign or a bar."""
    schema = scalar.json_schema()
    assert schema["type"] == kind
    assert schema["description"]


def test_open_ends_in_a_schema() -> None:
    """Open ends are JSON Schema's exclusive ones."""
    schema = Number(0, 1, open_ends=True).json_schema()
    assert (schema["exclusiveMinimum"], schema["exclusiveMaximum"]) == (0, 1)
    assert "minimum" not in schema
