"""Words as people write them, and the sentences that tell what is wrong with them."""

from __future__ import annotations

import pytest

from hedgerow.rules.words import (
    Choice,
    Flag,
    Loose,
    Name,
    Scalar,
    Text,
    WordsError,
    listed,
    refuse,
    shown,
    unknown_name,
    unknown_word,
)


def code_of(scalar: Scalar, value: object) -> str:
    """The code with which a scalar refuses a value, or "" when it reads it."""
    try:
        scalar.read(value)
    except WordsError as error:
        return error.faults[0].code
    return ""


@pytest.mark.parametrize("text", ["NO", "on", "12:30", "007", "null", "~", "1e3", "2011-01-03", "true", "é"])
def test_text_stays_text(text: str) -> None:
    """What YAML readers turn into flags, times, numbers or nothing stays the letters that were written."""
    assert Text().read(text) == text


def test_blanks_of_text_are_made_single() -> None:
    """A folded paragraph reads as one line."""
    assert Text().read("  a  paragraph\nover lines ") == "a paragraph over lines"


@pytest.mark.parametrize("value", [True, 5, 1.5, None, [], {}, "", "   ", "x" * 81, "a\x07b"])
def test_no_text(value: object) -> None:
    """Python values, nothing, too much and what cannot be printed."""
    assert code_of(Text(80), value) == "text"


def test_python_values_are_told_to_be_quoted() -> None:
    """From a mapping, `False` where text is wanted says what to do."""
    with pytest.raises(WordsError, match="is `false` where text is wanted") as caught:
        Text().read(False)
    assert caught.value.faults[0].remedy == "put it in quotes"


@pytest.mark.parametrize("name", ["call", "low put", "put_2", "a"])
def test_name_of_a_leg(name: str) -> None:
    """Small letters, digits, `_` and blanks."""
    assert Name().read(name) == name


@pytest.mark.parametrize(
    "name", ["NO", "12:30", "2put", "Call", "a.b", "", " a", "a ", "x" * 31, "pût", 5, None, "a\n"]
)
def test_no_name_of_a_leg(name: object) -> None:
    """Capitals, a digit first, dots and blanks at an end are refused: paths address legs by name."""
    assert code_of(Name(), name) == "name"


def test_choice_tells_the_nearest_word() -> None:
    """A misspelt word is answered with the right one and with all of them."""
    with pytest.raises(WordsError) as caught:
        Choice(("long", "short", "none")).read("shrt")
    (fault,) = caught.value.faults
    assert fault == Loose(
        (), "choice", "is `shrt`", "allowed: `long`, `short`, `none`", "did you mean `short`?"
    )


@pytest.mark.parametrize("value", [True, None, 1, ["long"], {}, "Long", ""])
def test_no_choice(value: object) -> None:
    """Anything but one of the words, as it is spelt."""
    assert code_of(Choice(("long", "short")), value) == "choice"


@pytest.mark.parametrize(("value", "flag"), [("true", True), (True, True), ("false", False), (False, False)])
def test_flag(value: object, flag: bool) -> None:
    """Two words and two Python values."""
    assert Flag().read(value) is flag


@pytest.mark.parametrize("value", ["NO", "no", "yes", "True", "on", 1, 0, "1", None, ""])
def test_no_flag(value: object) -> None:
    """What other readers of YAML take for a flag is refused, not guessed."""
    assert code_of(Flag(), value) == "flag"


@pytest.mark.parametrize("value", ["false", False])
def test_flag_that_is_said_by_leaving_it_out(value: object) -> None:
    """Where only `true` may stand, `false` says what to do instead."""
    with pytest.raises(WordsError) as caught:
        Flag(only_true=True).read(value)
    assert caught.value.faults[0].remedy == "leave the word out where it is not wanted"


@pytest.mark.parametrize(
    ("value", "text"),
    [
        ({"a": 1}, "a mapping"),
        ([1], "a list"),
        ("", "empty"),
        (None, "empty"),
        (True, "`true`"),
        ("a\nb", "`a b`"),
        ("x" * 50, "`" + "x" * 37 + "...`"),
    ],
)
def test_how_a_value_is_shown(value: object, text: str) -> None:
    """Short, on one line, shapes by their name."""
    assert shown(value) == text


def test_path_of_a_fault_grows_from_inside() -> None:
    """A fault told inside a mapping is told by the outer one with a longer path."""
    fault = Loose(("days",), "range", "is `0`").under("legs", "call", "expiry")
    assert fault.path == ("legs", "call", "expiry", "days")
    assert fault.code == "range"


def test_error_names_every_fault() -> None:
    """The message of the exception itself is readable too, with dotted paths."""
    error = WordsError([Loose(("a", 0), "x", "is `1`"), Loose(("b",), "y", "is missing", "allowed: text")])
    assert str(error) == "a.0 is `1`; b is missing allowed: text"


def test_refuse_raises_one_fault() -> None:
    """The short way to refuse the value at hand."""
    with pytest.raises(WordsError) as caught:
        refuse("code", "is wrong", "allowed: right", "mend it")
    assert caught.value.faults == (Loose((), "code", "is wrong", "allowed: right", "mend it"),)


def test_unknown_word_and_name() -> None:
    """Both tell what is allowed and the nearest; with nothing allowed they say so."""
    word = unknown_word(("strik",), "strik", ["strike", "expiry"], "a leg")
    assert word.found == "is not a word of a leg"
    assert word.remedy == "did you mean `strike`?"
    assert word.allowed == "allowed: `strike`, `expiry`"
    name = unknown_name(("with",), "cal", ["call"], "leg")
    assert (name.code, name.remedy) == ("unknown-name", "did you mean `call`?")
    assert unknown_name((), "x", [], "leg").allowed == "there is no other leg"
    assert unknown_word((), "x", []).allowed == "nothing may stand here"


def test_words_in_a_phrase() -> None:
    """The order of the language is kept."""
    assert listed(["b", "a"]) == "`b`, `a`"


def test_plain_scalar_lets_everything_through() -> None:
    """The glue alone has no opinion: its kinds do."""
    assert Scalar().read("x") == "x"
    assert Scalar().write(3) == 3
    assert Scalar().json_schema() == {}
