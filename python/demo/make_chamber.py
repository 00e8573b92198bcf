"""Writes chamber.obj: an invented chamber with an L-shaped floor and a sloping lid, in millimetres.

Run it only to change the chamber: `python python/demo/make_chamber.py`. The file is kept beside it.
"""

from pathlib import Path

# Corners (x, y) of the floor in mm, counter-clockwise from above, and the wall from each corner to the next.
OUTLINE = {
    "front": (0, 0),
    "right": (420, 0),
    "shoulder": (420, 180),
    "corner": (230, 200),
    "back": (200, 360),
    "left": (0, 330),
}


def lid(x: float) -> float:
    """Give the height of the lid in mm: it rises along x."""
    return 140 + 0.1 * x


def lines() -> list[str]:
    """Give the lines of the file; faces are counter-clockwise seen from outside."""
    corners = list(OUTLINE.values())
    n = len(corners)
    text = [
        "# A chamber for the colour calibration of leaf samples. Invented: no such chamber exists.",
        "# Millimetres; one group a wall. Written by make_chamber.py.",
    ]
    text += [f"v {x} {y} 0" for x, y in corners]
    text += [f"v {x} {y} {lid(x):g}" for x, y in corners]
    for i, name in enumerate(OUTLINE):
        j = (i + 1) % n
        text += [f"g {name}", f"f {i + 1} {j + 1} {n + j + 1} {n + i + 1}"]
    text += ["g floor", "f " + " ".join(str(i + 1) for i in reversed(range(n)))]
    text += ["g lid", "f " + " ".join(str(n + i + 1) for i in range(n))]
    return text


if __name__ == "__main__":
    path = Path(__file__).with_name("chamber.obj")
    path.write_text("\n".join(lines()) + "\n", encoding="utf-8")
    print(f"wrote {path}")
