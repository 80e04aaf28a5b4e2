"""Run as a process of its own: readings entered through the page by processes that are killed at random moments.

    kill_trial.py NOTEBOOK KILLS SEED

Each life is a process forked from this one. Like a geologist it looks at the page first: so many readings are kept,
and an entry may be half typed. It goes on from there, and acknowledges through a pipe each key and each keep after
the page has come back from it. It is killed with SIGKILL after a random time. Prints, as JSON, the readings that were
acknowledged and whatever was wrong when a life looked at the page.
"""

from __future__ import annotations

import json
import os
import random
import select
import signal
import sys
import time
import traceback
from datetime import UTC, datetime
from pathlib import Path

from analysis.orient.features import Feature
from fieldapp.outcrop import open_page

LONGEST_OPENING_S = 0.06  # every fourth life is killed so soon that it may not have opened the notebook yet
LONGEST_ENTRY_S = 0.14  # the others after they have seen the page


def clock() -> datetime:
    return datetime.now(UTC)


def only_backups(work, done, _failed) -> None:
    """Funnels and forecasts are no matter here; backups are, for they touch the files."""
    if "back_up" in work.__qualname__:
        done(work())


def keys_of(number: int) -> str:
    """The digits of the reading with this number; no two numbers have the same."""
    return f"{number % 360:03d}{10 + number // 360:02d}"


def live(path: Path, pipe: int) -> None:
    """Enter readings until killed."""
    page = open_page(path, clock=clock, dispatch=only_backups)
    number = len(page.standing)
    typed = page.entry.azimuth_text + page.entry.inclination_text
    side = page.entry.quadrant
    os.write(pipe, f"seen {number} {len(typed) + bool(side)}\n".encode())
    if not keys_of(number).startswith(typed) or (side and side != page.entry.expected_quadrant):
        os.write(pipe, f"wrong reading {number} has the entry {typed} {side}\n".encode())
    page.choose_feature(Feature.BEDDING)
    while True:
        keys = keys_of(number)
        for place in range(len(typed), len(keys)):
            page.digit(int(keys[place]))
            os.write(pipe, f"key {number} {place + 1}\n".encode())
        if not side:
            page.choose_quadrant(page.entry.expected_quadrant)
            os.write(pipe, f"key {number} {len(keys) + 1}\n".encode())
        if not page.keep():
            os.write(pipe, f"wrong {page.message}\n".encode())
            return
        os.write(pipe, f"kept {number} {page.recent[0].reading_id}\n".encode())
        number, typed, side = number + 1, "", ""


def one_life(path: Path, life_s: float, *, after_opening: bool) -> list[str]:
    """Let a process live for a while, from its start or its first look, and kill it; gives what it told."""
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(reader)
        try:
            live(path, writer)
        except BaseException:  # noqa: BLE001 - the parent must hear of it
            os.write(writer, f"wrong {traceback.format_exc()!r}\n".encode())
        os._exit(1)
    os.close(writer)
    if after_opening:
        select.select([reader], [], [], 30.0)
    time.sleep(life_s)
    os.kill(child, signal.SIGKILL)
    _, status = os.waitpid(child, 0)
    with os.fdopen(reader) as acknowledged:
        lines = acknowledged.read().splitlines()
    if not os.WIFSIGNALED(status):
        lines.append("wrong the process ended by itself")
    return lines


def main(path: Path, kills: int, seed: int) -> dict[str, object]:
    rng = random.Random(seed)  # noqa: S311 - moments to kill at, no secrets
    kept: dict[int, str] = {}
    wrong: list[str] = []
    done, keys = 0, 0  # readings acknowledged; keys acknowledged of the next one
    for life in range(kills):
        after_opening = life % 4 != 0
        life_s = rng.uniform(0.0, LONGEST_ENTRY_S if after_opening else LONGEST_OPENING_S)
        for line in one_life(path, life_s, after_opening=after_opening):
            word, *rest = line.split(maxsplit=2)
            match word:
                case "seen":
                    number, typed = int(rest[0]), int(rest[1])
                    if number not in (done, done + 1):
                        wrong.append(f"life {life}: {done} acknowledged, {number} seen")
                    elif number == done and not keys <= typed <= keys + 1:
                        wrong.append(f"life {life}: {keys} keys acknowledged, {typed} seen")
                    elif number == done + 1 and typed:
                        wrong.append(f"life {life}: kept, and still in the entry")
                    done, keys = number, typed
                case "key":
                    done, keys = int(rest[0]), int(rest[1])
                case "kept":
                    kept[int(rest[0])] = rest[1]
                    done, keys = int(rest[0]) + 1, 0
                case _:
                    wrong.append(line)
    return {"kept": kept, "wrong": wrong, "lives": kills, "readings": done}


if __name__ == "__main__":
    sys.stdout.write(json.dumps(main(Path(sys.argv[1]), int(sys.argv[2]), int(sys.argv[3]))))
