"""YAML as text with places: what is kept as written, what is refused, and where it stands."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.errors import DataError, InputError, RulesError
from hedgerow.yamltext import DEEPEST, MOST_BYTES, load, load_file, scan


def sentences(text: str) -> list[str]:
    """The faults of a text, as people read them."""
    return [str(fault) for fault in scan(text, "f")[1]]


@pytest.mark.parametrize(
    ("text", "plain"),
    [
        ("a: NO", {"a": "NO"}),
        ("a: 12:30", {"a": "12:30"}),
        ("a: 007", {"a": "007"}),
        ("a: 1e3", {"a": "1e3"}),
        ("a: 2012-03-30", {"a": "2012-03-30"}),
        ("a: ~", {"a": "~"}),
        ("a: null", {"a": "null"}),
        ("a: 0x1F", {"a": "0x1F"}),
        ("a: 2%", {"a": "2%"}),
        ("a:", {"a": None}),
        ("a: ''", {"a": ""}),
        ("yes: true", {"yes": "true"}),
        ("1: one", {"1": "one"}),
        ("<<: {a: 1}", {"<<": {"a": "1"}}),
        ("- 1\n- [2, {b: 3}]", ["1", ["2", {"b": "3"}]]),
        ("a: |\n  two\n  lines\n", {"a": "two\nlines\n"}),
        ("---\na: 1\n", {"a": "1"}),
        ("# only before\na: 1 # behind\n", {"a": "1"}),
    ],
)
def test_scalars_stay_text(text: str, plain: object) -> None:
    """YAML 1.1 turns most of these into booleans, sexagesimals, octals, dates or nulls (yaml.org/type)."""
    assert load(text, "f").plain() == plain


def test_every_node_knows_its_place_and_its_quotes() -> None:
    """Lines and columns counted by hand from 1, as editors count."""
    root = load("name: 'x'\nlegs:\n  call: {sell: call}\n  put:\n    - 1\n", "f")
    assert root.keys == {"name": (1, 1), "legs": (2, 1)}
    assert root.value["name"].quoted is True
    legs = root.value["legs"]
    assert (legs.line, legs.column, legs.kind) == (3, 3, "a mapping")
    assert legs.keys == {"call": (3, 3), "put": (4, 3)}
    sell = legs.value["call"].value["sell"]
    assert (sell.value, sell.line, sell.column, sell.quoted, sell.kind) == ("call", 3, 16, False, "text")
    first = legs.value["put"]
    assert (first.kind, first.value[0].line, first.value[0].column) == ("a list", 5, 7)
    assert load("a:", "f").value["a"].kind == "nothing"


def test_all_faults_of_a_text_come_in_one_pass() -> None:
    """A text with one of each refused thing; places counted by hand."""
    text = "a: 1\na: 2\nb: &x 1\nc: *x\nd: !t 3\n? [1]\n: 2\n? {}\n: 3\n"
    assert sentences(text) == [
        "f:2:1: the key `a` stands a second time; the first is on line 1; a key stands once; take one away",
        "f:3:4: the anchor &x; none is read; write it out",
        "f:4:4: the alias *x; none is read; write it out",
        "f:5:4: the tag !t; none is read; write the value alone",
        "f:6:3: a list stands as a key; a key is text",
        "f:8:3: a mapping stands as a key; a key is text",
    ]


def test_a_text_with_such_faults_is_still_read_as_far_as_it_goes() -> None:
    """The first of repeated keys is kept, so that a schema can look at the rest in the same pass."""
    node, faults = scan("a: 1\na: 2\nb: 3\n", "f")
    assert node is not None
    assert node.plain() == {"a": "1", "b": "3"}
    assert len(faults) == 1


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("", "f: nothing is written here; keys and values are wanted"),
        ("# only a remark\n", "f: nothing is written here; keys and values are wanted"),
        ("a: 1\n---\nb: 2\n", "f:2:1: a second document begins; one is read"),
        ("a:\n\tb: 1\n", "f:2:1: a tab stands in the indentation; YAML is indented with spaces; replace it"),
        ("a:\n  \tb: 1\n", "f:2:3: a tab stands in the indentation"),
        ("a:\tb\n", "f:1:3: a tab stands where a value begins; spaces separate a key from its value"),
        ("a: {b: 1\n", "f:2:1: while parsing a flow mapping expected ',' or '}'"),
        ("a: 'b\n", "f:2:1: while scanning a quoted scalar found unexpected end of stream"),
        ("a: @b\n", "f:1:4: while scanning for the next token found character '@'"),
        ("a: 1\n b: 2\n", "f:2:3: mapping values are not allowed here"),
        ("a: \x00\n", "f:1:4: the character U+0000 cannot be printed"),
        ("a: 1\nb: x\x1b[31m\n", "f:2:5: the character U+001B cannot be printed"),
        ("*a : 1\n", "f:1:1: the alias *a; none is read"),
    ],
)
def test_each_refusal_says_where_and_what(text: str, sentence: str) -> None:
    """One fault of syntax or of danger each, its place counted by hand."""
    found = sentences(text)
    assert len(found) == 1
    assert found[0].startswith(sentence)


def test_a_tab_does_not_hide_the_faults_behind_it() -> None:
    """The tab and the repeated key are both told."""
    found = sentences("a:\n\tb: 1\nc: 1\nc: 2\n")
    assert [sentence.split(": ")[0] for sentence in found] == ["f:2:1", "f:4:1"]


def test_an_alias_bomb_is_refused_without_growing() -> None:
    """The well-known ten-fold bomb: nine levels are a thousand million nodes where aliases are followed."""
    lines = ["a0: &a0 [x, x]"]
    lines += [f"a{n}: &a{n} [{', '.join([f'*a{n - 1}'] * 10)}]" for n in range(1, 10)]
    node, faults = scan("\n".join(lines), "f")
    assert node is not None
    assert {fault.code for fault in faults} == {"yaml-anchor", "yaml-alias"}
    with pytest.raises(InputError) as caught:
        load("\n".join(lines), "f")
    assert len(caught.value.faults) == 51
    assert "50 more faults of this file are not listed" in str(caught.value.faults[-1])


def test_deep_nesting_is_refused_and_the_rest_is_read() -> None:
    """The limit itself passes, one more does not; a hundred thousand levels are not read to their end."""
    fits = "[" * DEEPEST + "]" * DEEPEST
    assert scan(fits, "f")[1] == []
    _, faults = scan(f"- [{fits}]\n- a: 1\n  a: 2\n", "f")
    assert [fault.code for fault in faults] == ["yaml-deep", "yaml-repeated-key"]
    _, faults = scan("[" * 100_000, "f")
    assert [fault.code for fault in faults] == ["yaml-deep"]


def test_a_text_over_the_limit_is_not_parsed() -> None:
    """One byte over, in a character of two bytes."""
    assert sentences("a: " + "x" * (MOST_BYTES - 3)) == []
    assert sentences("a: " + "x" * (MOST_BYTES - 4) + "é")[0].startswith(
        "f: 1,000,001 bytes; at most 1,000,000"
    )


def test_the_caller_chooses_the_error() -> None:
    """A strategy's faults are RulesError, a dataset's DataError; both end a command with 2."""
    for error in (RulesError, DataError):
        with pytest.raises(error) as caught:
            load("a: 1\na: 2\n", "f", error)
        assert caught.value.exit_code == 2


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (b"a: \x00\x01\x02", "file-binary"),
        (b"a: caf\xe9\n", "file-encoding"),
        (b"x" * (MOST_BYTES + 1), "file-too-large"),
        (b"", "yaml-empty"),
    ],
)
def test_files_that_are_no_text_are_refused(tmp_path: Path, content: bytes, code: str) -> None:
    """Binary, Latin-1, oversized and empty files."""
    path = tmp_path / "f.yaml"
    path.write_bytes(content)
    with pytest.raises(DataError) as caught:
        load_file(path, DataError)
    assert [fault.code for fault in caught.value.faults] == [code]


def test_a_missing_file_and_a_folder_are_refused(tmp_path: Path) -> None:
    """Neither ends in a traceback."""
    for path, code in ((tmp_path / "no.yaml", "file-missing"), (tmp_path, "file-is-folder")):
        with pytest.raises(InputError) as caught:
            load_file(path)
        assert caught.value.faults[0].code == code


def test_marks_and_line_ends_of_other_systems_are_read(tmp_path: Path) -> None:
    """A byte order mark, UTF-16, and CRLF, as other editors write them."""
    path = tmp_path / "f.yaml"
    for content in (b"\xef\xbb\xbfa: 1\r\nb: 2\r\n", "a: 1\nb: 2\n".encode("utf-16")):
        path.write_bytes(content)
        assert load_file(path).plain() == {"a": "1", "b": "2"}


@given(st.text(max_size=200))
def test_no_text_raises_anything_but_input_errors(text: str) -> None:
    """Property: any text is a tree or a list of faults, and `load` agrees with `scan`."""
    node, faults = scan(text, "f")
    assert node is not None or faults
    if faults:
        with pytest.raises(InputError):
            load(text, "f")
    else:
        assert load(text, "f") == node


WORDS = st.text("abcxyz019.%:-_/ é", min_size=1, max_size=12)
TREES = st.recursive(
    WORDS,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(WORDS, inner, max_size=3),
    max_leaves=12,
)


def written(value: object) -> str:
    """A tree in YAML's flow style, every text in double quotes."""
    if isinstance(value, dict):
        return "{" + ", ".join(f'"{key}": {written(child)}' for key, child in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(written(child) for child in value) + "]"
    return f'"{value}"'


@given(TREES)
def test_what_is_written_is_what_is_read(tree: object) -> None:
    """Property: a tree of texts written by hand in flow style comes back the same."""
    assert load(written(tree), "f").plain() == tree
