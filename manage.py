#!/usr/bin/env python
"""Run one of Tarebook's commands; `manage.py open --demo` opens the shop."""

import os
import sys

FOR_SCRIPTS = ("contents", "heat", "transfer")  # they answer from physics alone: no settings, no database


def main() -> None:
    try:
        from django.core.management import execute_from_command_line, load_command_class
    except ImportError as error:
        raise SystemExit(
            "Django isn't installed for this Python. Make a virtual environment and run "
            "`pip install -r requirements.txt` in it, as README.md shows."
        ) from error
    if len(sys.argv) > 1 and sys.argv[1] in FOR_SCRIPTS:
        load_command_class("bottles", sys.argv[1]).run_from_argv(sys.argv)
        return
    os.environ.setdefault("DJANGO_SETTINGS_MODULE", "shop.settings")
    execute_from_command_line(sys.argv)


if __name__ == "__main__":
    main()
