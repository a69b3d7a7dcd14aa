"""The immutable mapping against a plain dict."""

from __future__ import annotations

import copy
import pickle

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.errors import UnknownNameError
from hystkit.base.frozen import Named

ENTRIES = st.dictionaries(st.text("RTBF_", min_size=1, max_size=3), st.integers(0, 3), max_size=5)


@given(ENTRIES)
def test_reads_as_the_dict_it_was_made_from(entries: dict[str, int]) -> None:
    named = Named(entries)
    assert list(named.items()) == list(entries.items())
    assert dict(named) == entries
    assert named == entries


@given(ENTRIES, ENTRIES)
def test_equality_and_hash_go_by_content(one: dict[str, int], other: dict[str, int]) -> None:
    assert (Named(one) == Named(other)) == (one == other)
    backwards = Named(reversed(one.items()))
    assert backwards == Named(one)
    assert hash(backwards) == hash(Named(one))


@given(ENTRIES)
def test_copies_and_pickles_are_equal_and_keep_the_order(entries: dict[str, int]) -> None:
    named = Named(entries)
    for same in (pickle.loads(pickle.dumps(named)), copy.copy(named), copy.deepcopy(named)):
        assert type(same) is Named
        assert list(same.items()) == list(entries.items())
    assert eval(repr(named)) == named


@given(ENTRIES, st.dictionaries(st.sampled_from("RTBF"), st.none() | st.integers(), max_size=4))
def test_replacing_sets_adds_and_leaves_out(
    entries: dict[str, int], changes: dict[str, int | None]
) -> None:
    named = Named(entries)
    changed = named.replacing(**changes)
    assert dict(named) == entries
    for name in {*entries, *changes}:
        assert changed.get(name) == changes.get(name, entries.get(name))
    kept = [name for name in entries if name in changed]
    assert list(changed)[: len(kept)] == kept


def test_later_changes_to_the_source_do_not_reach_it() -> None:
    source = {"R_T": 1.0}
    named = Named(source)
    source["R_T"] = 2.0
    assert named["R_T"] == 1.0


def test_a_missing_name_is_an_error_that_proposes_one_and_a_key_error_too() -> None:
    named = Named(R_T=1.0, R_F=2.0)
    assert "R_FF" not in named
    assert named.get("R_FF") is None
    with pytest.raises(UnknownNameError) as caught:
        named["R_FF"]
    assert caught.value.faults[0].remedy == "R_F"
    with pytest.raises(KeyError):
        named["R_FF"]


def test_nothing_about_it_can_be_changed() -> None:
    named = Named(R_T=1.0)
    with pytest.raises(AttributeError, match="replacing"):
        named.R_T = 2.0
    with pytest.raises(AttributeError, match="replacing"):
        del named._entries
    with pytest.raises(TypeError):
        named["R_T"] = 2.0  # type: ignore[index]
    assert dict(named) == {"R_T": 1.0}


def test_values_that_cannot_be_hashed_only_forbid_the_hash() -> None:
    named = Named(R_T=[1.0])
    assert named == {"R_T": [1.0]}
    with pytest.raises(TypeError, match="unhashable"):
        hash(named)
