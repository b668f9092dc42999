#!/usr/bin/env python
"""Run one of Tarebook's commands; `manage.py open --demo` opens the shop."""

import os
import sys


def main() -> None:
    os.environ.setdefault("DJANGO_SETTINGS_MODULE", "shop.settings")
    try:
        from django.core.management import execute_from_command_line
    except ImportError as error:
        raise SystemExit(
            "Django isn't installed for this Python. Make a virtual environment and run "
            "`pip install -r requirements.txt` in it, as README.md shows."
        ) from error
    execute_from_command_line(sys.argv)


if __name__ == "__main__":
    main()
