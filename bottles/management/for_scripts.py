"""What the commands for scripts share: options as text, one JSON object as the answer, nothing else.

They ask no database and read no setting: manage.py runs them without loading the shop.
"""

from __future__ import annotations

import json
import re
import sys
from argparse import Action, ArgumentParser, Namespace
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

from django.core.management import BaseCommand

from bottles.management.readers import OptionRefused, Reader
from shop.base.errors import Refusal
from shop.physics.errors import PhysicsError

REFUSED = 2  # exit code
NOT_COMPUTED = "not_computed"
FILLING_RATIO = 680.0  # kg/m3: 0.68 kg a litre, the usual limit for nitrous oxide (ADR P200; 49 CFR 173.304a)

Values = dict[str, Any]  # by the option's name with underscores, SI; None where it wasn't given


@dataclass(frozen=True, slots=True)
class Option:
    """One option of a command: its name, how its text is understood, what it says of itself."""

    name: str
    read: Reader
    help: str
    required: bool = False
    default: str | None = None  # as it would be written

    @property
    def key(self) -> str:
        return self.name.replace("-", "_")


class ScriptCommand(BaseCommand):
    """A command whose only output is JSON: its answer, or `error` and `sentence` with exit code 2."""

    requires_system_checks = ()
    options: Sequence[Option] = ()

    def answer(self, given: Values) -> dict[str, Any]:
        """What the command works out."""
        raise NotImplementedError

    def create_parser(self, prog_name: str, subcommand: str, **kwargs: Any) -> Any:
        """The options of this command alone: Django's own would let a script change its settings and its words."""
        parser = _Parser(self._refuse, prog=f"manage.py {subcommand}", description=self.help, allow_abbrev=False)
        parser.add_argument("--json", action="store_true", help="answer in JSON, as it does anyway")
        for option in self.options:
            also = f" (default: {option.default})" if option.default else ""
            parser.add_argument(
                "--" + option.name, action=_Once, required=option.required, help=option.help + also, metavar="VALUE"
            )
        # What Django's own start of a command looks for.
        parser.set_defaults(force_color=False, no_color=True, traceback=False, verbosity=1)
        return parser

    def run_from_argv(self, argv: list[str]) -> None:
        """Run without Django's closing of connections, which would load the settings to look for any."""
        options = self.create_parser(argv[0], argv[1]).parse_args(argv[2:])
        self.execute(**vars(options))

    def handle(self, *args: Any, **options: Any) -> None:
        try:
            told = json.dumps(self.answer(self._understood(options)), indent=2, allow_nan=False)
        except (PhysicsError, Refusal) as refusal:
            self._refuse(refusal.code, refusal.sentence)
        except (ArithmeticError, ValueError):  # the equation of state's own solver gave up
            self._refuse(NOT_COMPUTED, "There is no answer for these figures. Check each of them and its unit.")
        self.stdout.write(told)

    def _understood(self, options: Values) -> Values:
        """Each option's text turned into a number; a refusal names the option."""
        understood: Values = {}
        for option in self.options:
            text = options.get(option.key)
            text = option.default if text is None else text
            try:
                understood[option.key] = None if text is None else option.read(text)
            except (PhysicsError, Refusal) as refusal:
                raise OptionRefused(f"--{option.name}: {refusal.sentence}", code=refusal.code) from refusal
        return understood

    def _refuse(self, code: str, sentence: str) -> NoReturn:
        self.stdout.write(json.dumps({"error": code, "sentence": sentence}, indent=2))
        sys.exit(REFUSED)


class _Parser(ArgumentParser):
    """Takes a minus and a digit for a value, and hands what it refuses to the command."""

    def __init__(self, refuse: Callable[[str, str], NoReturn], **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self._refuse_as = refuse
        # argparse's own pattern takes -10 for a value but -10C for an option.
        self._negative_number_matcher = re.compile(r"-\s*[.,]?\d")

    def error(self, message: str) -> NoReturn:
        sentence = message[:1].upper() + message[1:]
        self._refuse_as("usage", f"{sentence}. Run the command with --help for its options.")


class _Once(Action):
    """Stores a value; a second one is refused rather than taken in its place."""

    def __call__(
        self, parser: ArgumentParser, namespace: Namespace, values: Any, option_string: str | None = None
    ) -> None:
        if getattr(namespace, self.dest) is not None:
            parser.error(f"{option_string} was given twice")
        setattr(namespace, self.dest, values)


def warnings_as_told(*groups: Iterable[tuple[str, str]]) -> list[dict[str, str]]:
    """Warnings of several sources as JSON, each code once."""
    first: dict[str, str] = {}
    for group in groups:
        for code, sentence in group:
            first.setdefault(code, sentence)
    return [{"code": code, "sentence": sentence} for code, sentence in first.items()]
