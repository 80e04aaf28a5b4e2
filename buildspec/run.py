"""Set Hingewise up and run it on the invented Mossgarth folds: ``python3 buildspec/run.py``.

With a display the app opens on the demo notebook. Without one the verdict is printed, and the pictures and the
report are written into out/. Further arguments go to ``hingewise demo``.
"""

from __future__ import annotations

import os
import subprocess
import sys

import setup_env


def main(arguments: list[str]) -> int:
    """Set up, then hand over to ``hingewise demo``; return its exit code."""
    setup_env.require_python()
    try:
        if setup_env.has_display():
            missing = setup_env.ensure_system(setup_env.WINDOW_PACKAGES)
            if missing:
                setup_env.say(setup_env.describe_missing(missing))
        setup_env.ensure_environment(setup_env.run_extras())
    except setup_env.SetupError as error:
        print(error, file=sys.stderr)
        return 2
    # Kivy would otherwise take the command's own arguments for its own.
    environment = {**os.environ, "KIVY_NO_ARGS": "1"}
    command = [str(setup_env.venv_program(setup_env.VENV, "hingewise")), "demo", *arguments]
    try:
        return subprocess.run(command, cwd=setup_env.ROOT, env=environment, check=False).returncode
    except KeyboardInterrupt:
        return 130


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
