"""Flags have a meaning each, and one order."""

import re

import pytest

from legwright.base.flags import MEANINGS, ordered


def test_slugs_are_plain_and_meanings_are_sentences():
    for slug, meaning in MEANINGS.items():
        assert re.fullmatch(r"[a-z]+(-[a-z]+)*", slug)
        assert meaning.endswith(".")
        assert "\n" not in meaning


def test_order_and_repeats():
    slugs = list(MEANINGS)
    assert ordered([slugs[3], slugs[0], slugs[3]]) == (slugs[0], slugs[3])
    assert ordered(reversed(slugs)) == tuple(slugs)
    assert ordered([]) == ()


def test_an_unknown_flag_is_our_fault():
    with pytest.raises(KeyError, match="no-such-flag"):
        ordered(["no-such-flag"])
