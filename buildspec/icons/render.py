"""Draw the icon and the picture shown while the app loads: ``python buildspec/icons/render.py``.

foreground.svg and background.svg are the sources; the PNG files beside them are made from these two and are what
buildozer.spec names. With ``--check`` nothing is written, and a PNG that is not what its source draws is named.
It needs resvg-py, of the extra "test".
"""

from __future__ import annotations

import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
LAYER_px = 432  # 108 dp at the densest screens: the size of an adaptive icon's layers
SHOWN_px = 288  # 72 dp of the 108: what a launcher shows of them
STORE_px = 512
PAPER, PRESPLASH_px = "#f7f6f1", 640


def inside(name: str) -> str:
    """Give what stands between the tags of a source, so that it can be put into another picture."""
    text = (HERE / name).read_text(encoding="utf-8")
    return text[text.index(">") + 1 : text.rindex("</svg>")]


def square(content: str, *, shown: int, size: int) -> str:
    """Give a picture of the middle `shown` units of the layers, `size` pixels wide."""
    corner = (LAYER_px - shown) / 2
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{size}" height="{size}" '
        f'viewBox="{corner:g} {corner:g} {shown} {shown}">{content}</svg>'
    )


def pictures() -> dict[str, bytes]:
    """Draw every PNG, by its name."""
    import resvg_py  # noqa: PLC0415 - only drawing needs it

    front, back = inside("foreground.svg"), inside("background.svg")
    sources = {
        "foreground.png": square(front, shown=LAYER_px, size=LAYER_px),
        "background.png": square(back, shown=LAYER_px, size=LAYER_px),
        # Before Android 8, in stores and on iOS one picture stands for both layers.
        "icon.png": square(back + front, shown=SHOWN_px, size=STORE_px),
        "presplash.png": square(back + front, shown=LAYER_px, size=PRESPLASH_px),
    }
    return {name: bytes(resvg_py.svg_to_bytes(svg_string=text)) for name, text in sources.items()}


def main(arguments: list[str]) -> int:
    """Write or check the pictures."""
    stale = []
    for name, picture in pictures().items():
        path = HERE / name
        if path.exists() and path.read_bytes() == picture:
            continue
        if "--check" in arguments:
            stale.append(name)
        else:
            path.write_bytes(picture)
            print(f"{name} written.")
    if stale:
        print(f"Not what the sources draw: {', '.join(stale)}. Run this without --check.")
    return 1 if stale else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
