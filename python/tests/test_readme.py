"""The README's Python example runs as it is printed."""

import re
from pathlib import Path

README = (Path(__file__).parents[2] / "README.md").read_text(encoding="utf-8")


def test_the_example_runs(capsys):
    blocks = re.findall(r"^```python\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
    assert blocks
    for block in blocks:
        exec(compile(block, "README.md", "exec"), {})
    printed = capsys.readouterr().out
    assert "closes to the last integer" in printed
    assert re.search(r"0\.2\d+ \d+\(\d\d\) W", printed)
