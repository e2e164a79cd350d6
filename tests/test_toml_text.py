"""Whatever TOML can say is written so that the standard reader reads the same."""

from __future__ import annotations

import math
import tomllib
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optim.toml_text import document, value_text

SCALARS = (
    st.booleans()
    | st.integers(-(2**63), 2**63 - 1)
    | st.floats(allow_nan=False)
    | st.text(st.characters(exclude_categories=["Cs"]))
    | st.datetimes()
    | st.dates()
    | st.times()
)
KEYS = st.text("ab .\"'é", max_size=4)
VALUES = st.recursive(
    SCALARS,
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(KEYS, inner, max_size=4),
    max_leaves=12,
)


@given(content=st.dictionaries(st.text('abc-_ ."\\\n#=', max_size=5), VALUES, max_size=6))
@settings(derandomize=True, max_examples=150, deadline=None)
def test_reads_back_the_same(content: dict[str, Any]) -> None:
    assert tomllib.loads(document(content)) == content


def test_numbers_keep_their_kind_and_sign() -> None:
    back = tomllib.loads(document({"a": 1.0, "b": 1, "c": -0.0, "d": 1e22, "e": math.nan}))
    assert [type(back[key]) for key in "ab"] == [float, int]
    assert math.copysign(1.0, back["c"]) == -1.0
    assert back["d"] == 1e22
    assert math.isnan(back["e"])


def test_what_has_no_word_is_refused() -> None:
    with pytest.raises(TypeError, match="no TOML for NoneType"):
        value_text(None)
