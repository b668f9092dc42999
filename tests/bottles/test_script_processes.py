"""Commands for scripts in processes of their own: the README's examples, with nothing of a shop around."""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest
from django.conf import settings

from tests.bottles.of_scripts import KEYS, MANAGE, bare, in_a_process, read, words

README = (Path(settings.BASE_DIR) / "README.md").read_text(encoding="utf-8")


def examples() -> list[str]:
    section = README.partition("## For scripts")[2].partition("\n## ")[0]
    blocks = re.findall(r"```sh\n(.*?)```", section, re.DOTALL)
    return [line for block in blocks for line in block.replace("\\\n", " ").splitlines() if line.strip()]


@pytest.mark.parametrize("example", examples(), ids=lambda example: example.split()[2])
def test_every_example_of_the_readme_runs(example, tmp_path):
    python, manage, name, *options = shlex.split(example)
    assert (python, manage) == (".venv/bin/python", "manage.py")
    before = set(MANAGE.parent.iterdir())
    told = in_a_process(tmp_path, name, *options)
    assert MANAGE.parent / ".tarebook" not in set(MANAGE.parent.iterdir()) - before
    assert (told.returncode, told.stderr) == (0, "")
    assert set(read(told.stdout)) - {"expected_bar"} == KEYS[name]
    assert list(tmp_path.iterdir()) == []


def test_the_readme_has_an_example_of_each():
    assert [example.split()[2] for example in examples()] == ["transfer", "contents", "heat"]


def test_neither_a_broken_configuration_nor_its_absence_matters(tmp_path):
    home = tmp_path / "home"
    home.mkdir()
    shop = tmp_path / "shop"
    broken = {"TAREBOOK_HOSTS": "*", "TAREBOOK_HOME": str(shop), "DATABASE_URL": "mysql://root@127.0.0.1/none"}
    told = in_a_process(home, "contents", *words("contents"), DJANGO_SETTINGS_MODULE="no.such", **broken)
    assert (told.returncode, told.stderr) == (0, "")
    assert read(told.stdout)["region"] == "saturated"
    assert not shop.exists() and list(home.iterdir()) == []


def test_a_refusal_has_exit_code_two_and_says_nothing_beside(tmp_path):
    told = in_a_process(tmp_path, "heat", *words("heat", watts="much"))
    assert (told.returncode, told.stderr) == (2, "")
    assert read(told.stdout)["error"] == "not_a_number"


def test_nothing_is_loaded_that_the_answer_does_not_need(tmp_path):
    heavy = ["psycopg", "celery", "kombu", "sqlite3", "reportlab", "shop.settings", "bottles.models", "shop.base.models"]
    program = (
        f"import runpy, sys\nsys.argv = {['manage.py', 'transfer', *words('transfer')]!r}\n"
        f"runpy.run_path({str(MANAGE)!r}, run_name='__main__')\n"
        f"print(sorted(set({heavy!r}) & set(sys.modules)), file=sys.stderr)\n"
    )
    told = subprocess.run(
        [sys.executable, "-c", program],
        cwd=tmp_path, env=bare(tmp_path, PYTHONPATH=str(settings.BASE_DIR)), capture_output=True, text=True, timeout=120,
        check=False,
    )  # fmt: skip
    assert (told.returncode, told.stderr.strip()) == (0, "[]")
