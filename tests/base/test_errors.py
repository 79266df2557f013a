"""A refusal says where, and offers the nearest name."""

import pytest

from legwright.base.errors import InputError, nearest


@pytest.mark.parametrize(
    ("name", "allowed", "clause"),
    [
        ("gran", ["grain", "wire"], "did you mean 'grain'? (allowed: grain, wire)"),
        ("hot_k", {"hot_K", "cold_K"}, "did you mean 'hot_K'? (allowed: cold_K, hot_K)"),
        ("zzz", ["grain", "wire"], "(allowed: grain, wire)"),
        ("", ["grain"], "(allowed: grain)"),
    ],
)
def test_nearest(name, allowed, clause):
    assert nearest(name, allowed) == clause


@pytest.mark.parametrize(
    ("where", "text"),
    [
        ({}, "is wrong"),
        ({"file": "a.toml"}, "a.toml: is wrong"),
        ({"key": "duty.hot_K"}, "duty.hot_K: is wrong"),
        ({"file": "a.toml", "key": "duty.hot_K"}, "a.toml: duty.hot_K: is wrong"),
    ],
)
def test_input_error_says_where(where, text):
    assert str(InputError("is wrong", **where)) == text
    assert isinstance(InputError("is wrong"), ValueError)


def test_a_refusal_is_one_printable_line_of_bounded_length():
    said = str(InputError("value 'a\nb\x1b[31m\u202e' " + "x" * 5000, file="odd\tname.toml"))
    assert said.isprintable()
    assert len(said) < 2100
    assert said.startswith("odd name.toml: value 'a b\\x1b[31m")
