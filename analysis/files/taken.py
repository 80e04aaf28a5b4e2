"""What a spreadsheet takes a text for: a number, a date, a time or a truth value, which it then writes its own way.

An outcrop 007 comes back as 7, 1.10 as 1.1, a note 1/2 as a day of this year, and TRUE as WAHR. Found with the
spreadsheet named in tests/analysis/files/spreadsheet; what others do beyond that is from memory.
"""

from __future__ import annotations

import re

# Signs that numbers, dates, times, shares and sums of money are written with, beside digits. The spaces that
# do not break part thousands in some languages.
_SIGN = "[0-9 \N{NO-BREAK SPACE}\N{NARROW NO-BREAK SPACE}.,:/'%()$€£¥+-]"
_EXPONENT = r"(?<=[0-9., ])e(?= ?[+-]? ?[0-9])"
_MONTH = (
    "jan(?:uary|uar|vier)?|jän(?:ner)?|ene(?:ro)?|feb(?:ruary|ruar|rero)?|févr?(?:ier)?|mar(?:ch|s|zo)?|märz?|"
    "apr(?:il)?|avr(?:il)?|abr(?:il)?|may|mai|mayo|june?|juni|juin|junio|july?|juli|juil(?:let)?|julio|"
    "aug(?:ust)?|août|ago(?:sto)?|sept?(?:ember|embre|iembre)?|o[ck]t(?:ober|obre|ubre)?|"
    "nov(?:ember|embre|iembre)?|de[cz](?:ember)?|déc(?:embre)?|dic(?:iembre)?"
)
_NUMBER_OR_DATE = re.compile(
    rf"(?:{_SIGN}++|{_EXPONENT})*+(?:(?:{_MONTH}){_SIGN}*+)?(?:[ap]\.?m\.?)?", re.IGNORECASE
)
_DIGIT = re.compile("[0-9]")
# Comes back as it is; longer whole numbers are rounded or written with an exponent (11 digits: from memory).
_PLAIN = re.compile("0|[1-9][0-9]{0,10}")

# The truth values of spreadsheets by language, as that spreadsheet writes them; casefolded.
TRUE_WORDS = frozenset(
    "true wahr vrai vero verdadero verdadeiro waar sant sann sand tosi prawda pravda igaz истина істина doğru "
    "σωστό adevărat točno вярно tõene rétt veritat".casefold().split()
)
_TRUTH_WORDS = TRUE_WORDS | frozenset(
    "false falsch faux falso onwaar falskt usann falsk epätosi fałsz nepravda hamis ложь брехня yanliş λάθος fals "
    "netočno невярно väär rangt".casefold().split()
)
_LONGEST = max(map(len, _TRUTH_WORDS))


def taken_for_another(text: str) -> bool:
    """Whether a spreadsheet may take a text for a number, date, time or truth value and write it otherwise."""
    if _NUMBER_OR_DATE.fullmatch(text):
        return bool(_DIGIT.search(text)) and not _PLAIN.fullmatch(text)
    return len(text) <= _LONGEST and text.casefold() in _TRUTH_WORDS
