"""What the documents name exists, and what they tell people to type works."""

import re
import shlex
from pathlib import Path

import pytest
from django.conf import settings
from django.core.management import get_commands, load_command_class

from manage import FOR_SCRIPTS

ROOT = Path(settings.BASE_DIR)
README = (ROOT / "README.md").read_text(encoding="utf-8")
DOCUMENTS = [ROOT / "README.md", ROOT / "DEVELOPERS.md"]


def shell_lines() -> list[str]:
    """Lines to type, without those for scripts (tests/bottles/test_script_processes.py runs them)."""
    of_people = README.partition("## For scripts")[0]
    return [line for block in re.findall(r"```sh\n(.*?)```", of_people, re.DOTALL) for line in block.splitlines()]


def test_one_line_starts_the_shop_and_one_tests_it():
    start, test = shell_lines()
    assert start.endswith("manage.py open --demo")
    assert "-m pytest" in test
    for line in (start, test):
        assert " && " in line
        for words in map(shlex.split, line.split(" && ")):
            if "-r" in words:
                assert (ROOT / words[words.index("-r") + 1]).is_file()


def test_ci_runs_the_very_line_of_the_readme():
    runner = (ROOT / ".ci/run").read_text(encoding="utf-8")
    assert "README_TEST=$(sed -n '/^## Test/,/^## /p' README.md | grep -- '-m pytest')" in runner
    assert 'tests sqlite "$README_TEST"' in runner


def test_the_readme_opens_with_the_job_in_one_paragraph():
    title, paragraph, heading = README.split("\n\n")[:3]
    assert title == "# Tarebook"
    assert len(paragraph.split()) > 40
    assert heading.startswith("## Start")


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda path: path.name)
def test_every_path_that_a_document_names_exists(document):
    text = document.read_text(encoding="utf-8")
    named = set(re.findall(r"`((?:shop|bottles|tuning|templates|tests|\.ci)/[A-Za-z0-9_./-]*[A-Za-z0-9_])/?`", text))
    assert sorted(name for name in named if not (ROOT / name).exists()) == []


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda path: path.name)
def test_every_command_that_a_document_names_exists(document):
    named = set(re.findall(r"manage\.py ([a-z_]+)", document.read_text(encoding="utf-8")))
    assert named - set(get_commands()) == set()


def test_every_flag_that_the_readme_names_exists():
    commands = [("shop.base", "open"), *(("bottles", name) for name in FOR_SCRIPTS)]
    parsers = [load_command_class(app, name).create_parser("manage.py", name) for app, name in commands]
    known = {option for parser in parsers for action in parser._actions for option in action.option_strings}
    named = {flag for line in README.splitlines() if "pip" not in line for flag in re.findall(r"(--[a-z-]+)", line)}
    assert named
    assert named - known == set()


def test_every_setting_that_the_readme_names_is_read():
    code = (ROOT / "shop/settings.py").read_text(encoding="utf-8")
    named = {name.removesuffix("_FILE") for name in re.findall(r"\b(TAREBOOK_[A-Z_]+|DATABASE_URL[A-Z_]*)\b", README)}
    assert {name for name in named if f'"{name}"' not in code} == set()


def test_every_direct_requirement_is_locked_with_hashes():
    lock = (ROOT / "requirements.txt").read_text(encoding="utf-8")
    tests_lock = (ROOT / "tests/requirements.txt").read_text(encoding="utf-8")
    assert tests_lock.startswith("-r ../requirements.txt\n")
    for name, text in (("run.in", lock), ("test.in", lock + tests_lock)):
        for line in (ROOT / ".requirements" / name).read_text(encoding="utf-8").splitlines():
            wanted = re.match(r"[A-Za-z0-9-]+", line)
            if wanted:
                pinned = rf"^{wanted[0]}(\[.*\])?==\S.*\\\n    --hash=sha256:"
                assert re.search(pinned, text, re.MULTILINE | re.IGNORECASE), wanted[0]
    for text in (lock, tests_lock):
        assert not re.search(r"^\s*--(index-url|extra-index-url|find-links|trusted-host)|file:|://", text, re.MULTILINE)
