"""A keyboard, where one is joined: digits type, Enter keeps, Esc clears, arrows choose the feature."""

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.core.window import Keyboard as KivyKeyboard

from fieldapp.devices.choose import is_field_build

if TYPE_CHECKING:
    from fieldapp.app import HingewiseApp

CODES = KivyKeyboard.keycodes
DIGITS = {CODES[str(digit)]: str(digit) for digit in range(10)} | {
    CODES[f"numpad{digit}"]: str(digit) for digit in range(10)
}
POINTS = {CODES["."], CODES["numpaddecimal"], CODES[","]}
ENTER, ESCAPE = {CODES["enter"], CODES["numpadenter"]}, {CODES["escape"]}
STEPS = {CODES["left"]: -1, CODES["up"]: -1, CODES["right"]: 1, CODES["down"]: 1}


class Keyboard:
    """Turns key codes into what the Log leaf's own keys do."""

    def __init__(self, app: HingewiseApp) -> None:
        self._app = app

    def key_down(self, _window: object, code: int, *_: object) -> bool:
        """Handle a key; True where it meant something."""
        outline = self._app.outline
        if outline is None:
            return False
        if code in ESCAPE and is_field_build():
            return self._app.go_back()  # Android's back key has the code of Esc, and must not clear the entry
        if outline.sheet is not None:
            return self._key_on_sheet(code)
        return "Log" in outline.names_shown and self._key_on_log(code)

    def _key_on_log(self, code: int) -> bool:
        log = self._app.outline.leaf("Log")
        if code in DIGITS:
            log.sign(DIGITS[code])
        elif code in POINTS:
            log.sign(".")
        elif code == CODES["backspace"]:
            log.sign("back")
        elif code in ENTER:
            log.press_keep()
        elif code in ESCAPE:
            log.press_clear()
        elif code in STEPS:
            self._app.page.step_feature(STEPS[code])
        else:
            return False
        return True

    def _key_on_sheet(self, code: int) -> bool:
        sheet = self._app.outline.sheet
        if code in ESCAPE and sheet.closable:
            sheet.close()
            return True
        # A sheet with keys of its own takes the digits.
        take = getattr(sheet, "key", None)
        if take is None or not (
            code in DIGITS or code in ENTER or code in POINTS or code == CODES["backspace"]
        ):
            return False
        sign = DIGITS.get(code) or ("." if code in POINTS else "enter" if code in ENTER else "back")
        take(sign)
        return True
