"""The table in ``docs/names.md`` names what there is, and leaves nothing out."""

import inspect
import re
from pathlib import Path

import pytest

import albedra as al

PAGE = (Path(__file__).parents[2] / "docs" / "names.md").read_text(encoding="utf-8")
CELLS = re.findall(r"^\| `[^`]+` \| `([^`]+)` \|$", PAGE, re.MULTILINE)

# Classes whose every public member stands in the table or in the sentence below it.
COMPLETE = ("Coating", "Medium", "Region", "Source", "TimeGrid", "Enclosure", "Experiment", "Outcome")


def test_the_table_was_read():
    assert len(CELLS) > 90


@pytest.mark.parametrize("cell", CELLS)
def test_each_name_exists(cell):
    kind, member, keyword = re.fullmatch(r"(\w+)(?:\.(\w+))?(?:\((\w+)=\))?", cell).groups()
    found = getattr(al, kind)
    if member:
        found = getattr(found, member)
    if keyword:
        assert keyword in inspect.signature(found).parameters


@pytest.mark.parametrize("kind", COMPLETE)
def test_nothing_is_left_out(kind):
    members = {name for name in dir(getattr(al, kind)) if not name.startswith("_")}
    named = {name for name in members if re.search(rf"`{kind}\.{name}[`(]", PAGE)}
    assert members == named
