"""What stands on the screen in place of the page while the notebook cannot be opened."""

from __future__ import annotations

from kivy.properties import StringProperty

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Scrolled


class ShutNotebook(Scrolled):
    """Says why the notebook could not be opened, and has the key that tries again."""

    reason = StringProperty("")


load_kv("shut")
