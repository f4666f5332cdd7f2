"""A strategy that is read, written and read again is the same; and so is one that went through YAML."""

from __future__ import annotations

from typing import Any

import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.rules.document import tree_of_mapping, tree_of_text
from hedgerow.rules.load import load_strategy, read_strategy
from hedgerow.rules.overrides import changed
from random_strategies import strategies


def as_yaml(words: dict[str, Any]) -> str:
    """The words as the text of a file, written by PyYAML, percents and text in quotes where it needs them."""
    return yaml.safe_dump(words, sort_keys=False, default_flow_style=None, width=10_000)


@settings(max_examples=60)
@given(strategies())
def test_mapping_to_model_and_back(words: dict[str, Any]) -> None:
    """Compares a model with the model of its own words: equal, equal in hash, and equal in words again."""
    model = load_strategy(words)
    again = load_strategy(model.plain())
    assert again == model
    assert hash(again) == hash(model)
    assert again.plain() == model.plain()


@settings(max_examples=40)
@given(strategies())
def test_text_of_a_file_reads_as_the_mapping_does(words: dict[str, Any]) -> None:
    """Compares the model of YAML text, whose scalars are all text, with that of the Python mapping."""
    strategy, faults = read_strategy(tree_of_text(as_yaml(words), "random.yaml"))
    assert faults == []
    assert strategy == load_strategy(words)


@settings(max_examples=30)
@given(strategies(), st.data())
def test_changing_a_value_to_itself_changes_nothing(words: dict[str, Any], data: st.DataObject) -> None:
    """Compares a strategy with itself after one of its top words was replaced whole by what stood there."""
    word = data.draw(st.sampled_from(sorted(words)))
    tree = changed(tree_of_mapping(words), tree_of_mapping({word: words[word]}, "changes"))
    strategy, faults = read_strategy(tree)
    assert faults == []
    assert strategy == load_strategy(words)


@settings(max_examples=30)
@given(strategies(), st.data())
def test_a_value_set_by_path_is_the_value_set_by_hand(words: dict[str, Any], data: st.DataObject) -> None:
    """Compares `legs.NAME.ratio` set by a dotted path with the same ratio written into the mapping."""
    name = data.draw(
        st.sampled_from(sorted(name for name, leg in words["legs"].items() if "buy" in leg) or [""])
    )
    if not name:
        return
    by_path = load_strategy(words, {f"legs.{name}.ratio": 2})
    legs = {key: leg | ({"ratio": 2} if key == name else {}) for key, leg in words["legs"].items()}
    assert by_path == load_strategy(words | {"legs": legs})
