"""What the eye would see at once and a test must measure: words cut off, things outside their place."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

SLACK_PX = 1.5
LEAST_TYPE_DP = 9.5  # smaller words than this are not read on an outcrop
LEAST_TOUCH_DP = 44.0  # 7 mm; what a finger finds that looks for it (common practice, no source)


def shown(widget):
    """Give every widget that can be seen, from the top one down."""
    if widget.opacity == 0 or widget.width < 2 or widget.height < 2:
        return
    yield widget
    for child in widget.children:
        yield from shown(child)


def faults(top) -> list[str]:
    """List what is cut off, too small, or outside its place."""
    from kivy.metrics import Metrics
    from kivy.uix.label import Label
    from kivy.uix.scrollview import ScrollView

    from fieldapp.leaves.parts import Words

    found = []
    for widget in shown(top):
        name = f"{type(widget).__name__} {getattr(widget, 'text', '')!r}"
        parent = widget.parent
        if (
            parent is not None
            and parent is not top
            and not isinstance(parent, ScrollView)
            and widget is not top
        ):
            outside = (
                widget.x < parent.x - SLACK_PX
                or widget.y < parent.y - SLACK_PX
                or widget.right > parent.right + SLACK_PX
                or widget.top > parent.top + SLACK_PX
            )
            if outside and parent.get_root_window() is not parent:
                place = f"{type(parent).__name__} {parent.pos} {parent.size}"
                found.append(f"{name} at {widget.pos} {widget.size} leaves its {place}")
        found += touch_faults(widget)
        if isinstance(widget, Label) and widget.text:
            wide, high = widget.texture_size
            if wide > widget.width + SLACK_PX or high > widget.height + SLACK_PX:
                found.append(f"{name} is cut off: {wide} by {high} in {widget.size}")
            if isinstance(widget, Words):
                if not widget._fits():
                    found.append(f"{name} does not fit its line")
                size = widget.font_size * widget.shown_share / Metrics.density
                if size < LEAST_TYPE_DP:
                    found.append(f"{name} is set in {size:.1f} dp")
        boxes = getattr(widget, "words_boxes", None)
        if boxes:
            found += words_faults(widget, boxes)
    return found


def touch_faults(widget) -> list[str]:
    """List a key with a sign that is too small to touch; tests of the form hold the keys of the pad."""
    from kivy.metrics import Metrics

    from fieldapp.leaves.keys import DirectionGrid, KeyPad
    from fieldapp.leaves.parts import SignKey

    if not isinstance(widget, SignKey) or isinstance(widget.parent, KeyPad | DirectionGrid):
        return []
    least = min(widget.width, widget.height) / Metrics.density
    return [f"the key {widget.sign!r} is {least:.0f} dp small"] if least < LEAST_TOUCH_DP - 0.1 else []


def words_faults(widget, boxes) -> list[str]:
    """List words on a picture that leave it or lie on one another."""
    from fieldapp.drawing.placing import overlap

    found = []
    names = list(boxes)
    for number, name in enumerate(names):
        box = boxes[name]
        if (
            box[0] < widget.x - SLACK_PX
            or box[1] < widget.y - SLACK_PX
            or box[2] > widget.right + SLACK_PX
            or box[3] > widget.top + SLACK_PX
        ):
            found.append(f"{name!r} leaves its {type(widget).__name__}: {box} in {widget.pos} {widget.size}")
        for other in names[number + 1 :]:
            # Boxes of words hold some room above and below the letters.
            area = (box[2] - box[0]) * (box[3] - box[1])
            if overlap(box, boxes[other]) > 0.12 * area:
                found.append(f"{name!r} and {other!r} lie on one another on the {type(widget).__name__}")
    return found
