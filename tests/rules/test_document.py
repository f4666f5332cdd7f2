"""Files of strategies: every fault in one pass, each with its place, what is allowed and the nearest word."""

from __future__ import annotations

from pathlib import Path

import pytest

from hedgerow.errors import Fault, RulesError
from hedgerow.rules.document import Place, dotted, tree_of_file, tree_of_mapping, tree_of_text
from hedgerow.rules.load import load_strategy, read_strategy
from hedgerow.rules.words import Loose

EIGHT = """\
name: Eight faults
share: long
legs:
  call:
    sell: call
    expiry: {days: 7, listed: weekly}
    strike: {from_spot: 4, snap: up}
  put:
    buy: put
    expiry: {with: cal}
    strike: {from_spot: -4%, delta: 0.3}
accept:
  net_credit: NO
  odds_of_best: {between: [55%, 45%]}
enter:
  when: {signal: close_over_maen, sessions: 20}
exit:
  - {name: cut, if: {loss: {at_least: 12:30}}}
"""


def read(text: str) -> list[Fault]:
    """Every fault of a strategy's text."""
    strategy, faults = read_strategy(tree_of_text(text, "test.yaml"))
    assert (strategy is None) == bool(faults)
    return faults


def placed(text: str) -> list[tuple[int, int, str]]:
    """Line, column and code of every fault."""
    return [(fault.line, fault.column, fault.code) for fault in read(text)]


def test_eight_faults_in_one_pass() -> None:
    """Compares lines and columns with those counted by hand in the text above."""
    assert placed(EIGHT) == [
        (2, 1, "unknown-word"),
        (7, 25, "percent"),
        (10, 20, "unknown-name"),
        (11, 30, "one-of"),
        (13, 15, "flag"),
        (14, 27, "reversed"),
        (16, 18, "unknown-name"),
        (18, 39, "percent"),
    ]


def test_each_of_the_eight_is_a_sentence() -> None:
    """Compares with sentences by hand: where, what was found, what is allowed, what to do."""
    assert [str(fault) for fault in read(EIGHT)][:3] == [
        "test.yaml:2:1: `share` is not a word of this mapping; allowed: `name`, `about`, `shares`, `legs`, "
        "`after_assignment`, `accept`, `enter`, `exit`, `stop`, `fill`; did you mean `shares`?",
        "test.yaml:7:25: `legs.call.strike.from_spot` is `4`, a bare number; allowed: a percent from -90% to "
        "500%, written with its % sign; write 4%",
        "test.yaml:10:20: `legs.put.expiry.with` is `cal`, which is no leg of this strategy; allowed: `call`;"
        " did you mean `call`?",
    ]
    assert "did you mean `close_over_mean`?" in str(read(EIGHT)[6])


def test_file_is_named_as_it_was_given(tmp_path: Path) -> None:
    """The place of a fault begins with the path that the caller wrote."""
    path = tmp_path / "eight.yaml"
    path.write_text(EIGHT, encoding="utf-8")
    with pytest.raises(RulesError) as caught:
        load_strategy(path)
    assert len(caught.value.faults) == 8
    assert str(caught.value).splitlines()[0].startswith(f"{path}:2:1: ")
    assert caught.value.exit_code == 2


def test_repeated_key_keeps_the_rest_going() -> None:
    """The key is told where it stands again, and the other faults are told too."""
    text = (
        "name: a\nlegs:\n  put:\n    buy: put\n    buy: put\n    expiry: {days: 30}\n    strike: {delta: 3}\n"
    )
    assert placed(text) == [(5, 5, "yaml-repeated-key"), (7, 21, "range")]


def test_alias_bomb_is_refused_at_once() -> None:
    """The text that grows a billionfold when aliases are followed: each is told, none is read."""
    bomb = 'name: a\na: &a ["x","x","x","x","x","x","x","x","x"]\n' + "".join(
        f"{chr(ord(name) + 1)}: &{chr(ord(name) + 1)} [{','.join(['*' + name] * 9)}]\n" for name in "abcdefgh"
    )
    codes = {fault.code for fault in read(bomb)}
    assert {"yaml-anchor", "yaml-alias"} <= codes


def test_alias_is_told_once() -> None:
    """What an alias leaves empty is not told a second time."""
    assert placed("name: &n a\nlegs: *n\n") == [(1, 7, "yaml-anchor"), (2, 7, "yaml-alias")]


@pytest.mark.parametrize("name", ["NO", "12:30", "12:30:00", "~", "0o17", "1e3", "2011-01-03", "no", "yes"])
def test_text_is_not_turned_into_something_else(name: str) -> None:
    """What other YAML readers make a flag, a time, a number or a date of is the name as written."""
    strategy, faults = read_strategy(tree_of_text(f"name: {name}\n", "test.yaml"))
    assert faults == []
    assert strategy is not None
    assert strategy.name == name


@pytest.mark.parametrize(
    ("line", "code"),
    [
        ("shares: NO", "choice"),
        ("shares: 12:30", "choice"),
        ("fill: 12:30", "choice"),
        ("stop: {below_entry: NO}", "percent"),
        ("stop: {below_entry: 12:30}", "percent"),
        ("accept: {net_credit: NO}", "flag"),
        ("exit: [{name: NO, if: {held: {at_least: 12:30}}}]", "whole"),
        ("legs: {NO: {buy: put, expiry: {days: 30}, strike: {delta: 0.3}}}", "name"),
    ],
)
def test_no_and_half_past_twelve_where_something_else_is_meant(line: str, code: str) -> None:
    """Neither is guessed at: the fault shows what was written."""
    (fault,) = [fault for fault in read(f"name: a\n{line}\n") if fault.code == code]
    assert fault.line == 2
    assert "NO" in fault.found or "12:30" in fault.found


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("name: a\nfill:\n", [(2, 1, "empty")]),
        ("name: a\nexit:\n  -\n", [(3, 4, "empty")]),
        ("name: a\nenter: {when: }\n", [(2, 9, "empty")]),
        ("name:\n", [(1, 1, "empty")]),
    ],
)
def test_nothing_written(text: str, found: list[tuple[int, int, str]]) -> None:
    """A word with nothing after it is told at the word, once; it is never taken for its default."""
    assert placed(text) == found


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "yaml-empty"),
        ("# nothing\n", "yaml-empty"),
        ("name: a\n\tshares: long\n", "yaml-tab"),
        ("name: [a\n", "yaml-syntax"),
        ("- name: a\n", "shape"),
        ("just text\n", "shape"),
        ("name: !!str a\n", "yaml-tag"),
        ("name: a\n---\nname: b\n", "yaml-documents"),
    ],
)
def test_files_that_are_no_strategy(text: str, code: str) -> None:
    """Empty, broken, a list, a sentence, tags, two documents: a fault and no traceback."""
    assert code in [fault.code for fault in read(text)]


def test_missing_words_are_told_where_they_are_missed() -> None:
    """At the nearest key around."""
    assert placed("shares: long\nlegs:\n  put: {buy: put, strike: {delta: 0.3}}\n") == [
        (1, 1, "missing"),
        (3, 3, "missing"),
    ]


def test_missing_file_binary_file_folder_and_encoding(tmp_path: Path) -> None:
    """Each is one readable fault; nothing of it is a traceback."""
    binary, latin = tmp_path / "binary.yaml", tmp_path / "latin.yaml"
    binary.write_bytes(b"name: a\x00\x01\x02")
    latin.write_bytes("name: Zürich\n".encode("latin-1"))
    for path, code in (
        (tmp_path / "none.yaml", "file-missing"),
        (tmp_path, "file-is-folder"),
        (binary, "file-binary"),
        (latin, "file-encoding"),
    ):
        with pytest.raises(RulesError) as caught:
            load_strategy(path)
        assert [fault.code for fault in caught.value.faults] == [code]


def test_faults_of_a_mapping_have_names_instead_of_places() -> None:
    """From Python there is no line; the dotted name says where."""
    with pytest.raises(RulesError) as caught:
        load_strategy({"name": "a", "exit": [{"name": "cut", "if": {"loss": {"at_least": 2}}}]})
    assert str(caught.value).startswith("strategy: `exit.cut.if.loss.at_least` is `2`, a bare number")


def test_many_faults_are_capped() -> None:
    """A file of another kind is not answered with a thousand lines."""
    text = "name: a\n" + "".join(f"word{at}: 1\n" for at in range(200))
    with pytest.raises(RulesError) as caught:
        load_strategy({"name": "a"} | {f"word{at}": 1 for at in range(200)})
    assert len(caught.value.faults) == 51
    assert len(read(text)) == 200


def test_places_of_values_and_keys() -> None:
    """Compares places with those counted by hand; what is not there has the place of what is around it."""
    tree = tree_of_text("name: a\nlegs:\n  put: {buy: put}\n", "t.yaml")
    assert tree.place(("legs", "put", "buy")) == Place("t.yaml", 3, 14)
    assert tree.place(("legs", "put"), key=True) == Place("t.yaml", 3, 3)
    assert tree.place(("legs", "put", "strike", "delta")) == Place("t.yaml", 3, 3)
    assert tree.place(("nowhere",)) == Place("t.yaml", 1, 1)
    assert tree_of_mapping({"name": "a"}).place(("name",)) == Place("strategy")


def test_part_of_a_tree_keeps_its_places() -> None:
    """A strategy inside a study is read on its own, with the lines of the study."""
    part = tree_of_text("strategy:\n  name: a\n  legs: {}\n", "study.yaml").below(("strategy",))
    assert part.plain == {"name": "a", "legs": {}}
    assert part.place(("name",)) == Place("study.yaml", 2, 9)
    fault = part.fault(Loose(("legs",), "legs", "is wrong"))
    assert (fault.where, fault.line, fault.found) == ("study.yaml", 3, "`legs` is wrong")


def test_changing_a_copy_leaves_the_tree_alone() -> None:
    """Variants are made from copies."""
    tree = tree_of_mapping({"legs": {"put": {"ratio": 1}}})
    copy = tree.copy()
    copy.plain["legs"]["put"]["ratio"] = 2
    assert tree.plain["legs"]["put"]["ratio"] == 1


def test_a_mapping_is_not_changed_by_reading_it() -> None:
    """The caller's mapping stays as it was; tuples may stand for lists."""
    rule = {"name": "cut", "if": {"loss": {"at_least": "2%"}}}
    words = {"name": "a", "exit": (rule,)}
    load_strategy(words, {"exit.cut.if.loss.at_least": "3%"})
    assert words == {"name": "a", "exit": (rule,)}
    assert rule == {"name": "cut", "if": {"loss": {"at_least": "2%"}}}


def test_names_of_paths() -> None:
    """Items of a list have their name, or their number from 1."""
    plain = {"exit": [{"name": "cut"}, {"if": {}}], "all": [1, 2]}
    assert dotted(("exit", 0, "if"), plain) == "exit.cut.if"
    assert dotted(("exit", 1, "if"), plain) == "exit.2.if"
    assert dotted(("all", 1), plain) == "all.2"
    assert dotted(("a", 0, "b")) == "a.1.b"


def test_tree_of_a_missing_file_holds_its_fault(tmp_path: Path) -> None:
    """The tree is empty and says why."""
    tree = tree_of_file(tmp_path / "none.yaml")
    assert tree.plain == {}
    assert [fault.code for fault in tree.faults] == ["file-missing"]
