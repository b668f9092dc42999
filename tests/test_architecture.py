"""The rules of the house that a reader would overlook."""

import ast
import importlib
import os
import re
import subprocess
import sys
from collections import defaultdict
from collections.abc import Iterator
from pathlib import Path

import pytest
from django.apps import apps
from django.conf import settings
from django.db import models

ROOT = Path(settings.BASE_DIR)
TOP_LEVEL = {
    "README.md", "DEVELOPERS.md", "manage.py", "shop", "bottles", "tuning", "templates", "tests", "requirements.txt",
}  # fmt: skip
PURE = ("shop/physics", "shop/rules", "bottles/physics", "bottles/rules")
FRAMEWORKS = {"django", "celery", "reportlab", "CoolProp", "kombu"}
MOST_LINES, MOST_NAMES = 400, 10

APPS_FROM_BELOW = ["base", "people", "cars", "bottles", "tuning", "orders", "rooms", "demo"]
FRAMEWORK_APPS_BELOW = {"auth", "contenttypes", "sessions"}

# Split, so that this file doesn't hold the words it looks for.
NOT_TO_BE_CITED = re.compile(
    r"\b(" + "|".join(["tran" + "scripts?", "lec" + "tures?", "you" + "tube", "web" + "inars?", "pod" + "casts?"]) + r")\b"
    r"|\.\./sha" + r"red|/wo" + r"rk/main|/tm" + r"p/tb",
    re.IGNORECASE,
)


def python_files(*folders: str) -> list[Path]:
    found = [path for folder in folders for path in sorted((ROOT / folder).rglob("*.py"))]
    return [path for path in found if "__pycache__" not in path.parts]


def kept_files() -> Iterator[Path]:
    """Every file that belongs to the project, with the dot-files, without what tools leave behind."""
    left_behind = {".git", ".venv", ".tarebook", ".hypothesis", "__pycache__", "node_modules"}
    for folder, folders, files in os.walk(ROOT):
        folders[:] = [f for f in folders if f not in left_behind and not f.endswith("_cache")]
        yield from (Path(folder) / name for name in files if not name.endswith(".pyc"))


def relative(path: Path) -> str:
    return path.relative_to(ROOT).as_posix()


def test_imports_only_go_downward():
    told = subprocess.run(
        [Path(sys.executable).with_name("lint-imports"), "--no-cache", "tests/imports.ini"],
        cwd=ROOT, capture_output=True, text=True, check=False, timeout=120,
        env=os.environ | {"PYTHONPATH": str(ROOT), "PYTHONWARNINGS": "ignore"},
    )  # fmt: skip
    assert told.returncode == 0, told.stdout + told.stderr


def test_physics_and_rules_load_without_any_framework():
    modules = [relative(path)[:-3].replace("/", ".").removesuffix(".__init__") for path in python_files(*PURE)]
    assert len(modules) > 10
    program = (
        "import importlib, sys\n"
        f"for name in {modules!r}: importlib.import_module(name)\n"
        f"print(sorted({FRAMEWORKS!r} & {{name.partition('.')[0] for name in sys.modules}}))\n"
    )
    told = subprocess.run(
        [sys.executable, "-c", program], cwd=ROOT, capture_output=True, text=True, check=False, timeout=60
    )
    assert told.stdout.strip() == "[]", told.stdout + told.stderr


def test_nothing_but_the_fluid_names_coolprop():
    named = [
        relative(path)
        for path in python_files("shop", "bottles", "tuning")
        if re.search(r"^\s*(from|import) CoolProp\b", path.read_text(encoding="utf-8"), re.MULTILINE)
    ]
    assert named == ["shop/physics/fluid.py"]
    tree = ast.parse((ROOT / named[0]).read_text(encoding="utf-8"))
    assert not [
        node for node in tree.body if isinstance(node, ast.Import | ast.ImportFrom) and "CoolProp" in ast.unparse(node)
    ], "CoolProp takes seconds to load: import it inside functions"


def test_no_module_is_longer_than_four_hundred_lines():
    long = {}
    for path in python_files("shop", "bottles", "tuning", "tests"):
        lines = len(path.read_text(encoding="utf-8").splitlines())
        if lines > MOST_LINES and "migrations" not in path.parts:
            long[relative(path)] = lines
    assert long == {}


def test_no_module_has_more_than_ten_public_functions_and_classes():
    crowded = {}
    for path in python_files("shop", "bottles", "tuning"):
        tree = ast.parse(path.read_text(encoding="utf-8"))
        public = [
            node.name
            for node in tree.body
            if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_")
        ]
        if len(public) > MOST_NAMES:
            crowded[relative(path)] = len(public)
    assert crowded == {}


def test_every_function_says_what_it_returns():
    silent = []
    for path in python_files("shop", "bottles", "tuning"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.FunctionDef) and node.returns is None:
                silent.append(f"{relative(path)}:{node.lineno} {node.name}")
    assert silent == []


def test_no_name_of_a_test_is_used_twice():
    places = defaultdict(list)
    for path in python_files("tests"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
                places[node.name].append(f"{relative(path)}:{node.lineno}")
    assert {name: where for name, where in places.items() if len(where) > 1} == {}


def test_every_folder_of_tests_is_a_package():
    bare = {relative(path.parent) for path in python_files("tests") if not (path.parent / "__init__.py").exists()}
    assert bare == set()


def test_nothing_is_added_at_the_top():
    if not (ROOT / ".git").exists():
        pytest.skip("needs the repository: run it in a git checkout")
    told = subprocess.run(
        ["git", "ls-files", "--cached"], cwd=ROOT, capture_output=True, text=True, check=True, timeout=30
    )
    top = {line.partition("/")[0] for line in told.stdout.splitlines()}
    assert {name for name in top if not name.startswith(".")} <= TOP_LEVEL


def test_the_shop_package_is_empty():
    assert (ROOT / "shop/__init__.py").read_text(encoding="utf-8").strip() == ""


def test_nothing_cites_what_cannot_be_checked():
    found = []
    for path in kept_files():
        try:
            text = path.read_text(encoding="utf-8")
        except UnicodeDecodeError:
            continue
        found += [f"{relative(path)}: {match[0]}" for match in NOT_TO_BE_CITED.finditer(f"{relative(path)}\n{text}")]
    assert found == []


def relations() -> Iterator[models.ForeignKey]:
    for model in apps.get_models():
        if model._meta.app_label in APPS_FROM_BELOW:
            yield from (
                field for field in model._meta.get_fields(include_hidden=False)
                if isinstance(field, models.ForeignKey | models.ManyToManyField)
            )  # fmt: skip


def test_no_foreign_key_points_upward():
    upward = []
    for field in relations():
        ours, theirs = field.model._meta.app_label, field.related_model._meta.app_label
        if theirs in FRAMEWORK_APPS_BELOW or (field.related_model._meta.label == settings.AUTH_USER_MODEL):
            continue  # who did it: the one exception, named by the setting and never by an import
        if APPS_FROM_BELOW.index(theirs) > APPS_FROM_BELOW.index(ours):
            upward.append(str(field))
    assert upward == []


def test_no_foreign_key_gives_another_app_a_reverse_name():
    named = [
        str(field)
        for field in relations()
        if field.model._meta.app_label != field.related_model._meta.app_label and not field.remote_field.hidden
    ]
    assert named == []


def test_every_app_of_ours_has_its_layer():
    ours = {
        config.label for config in apps.get_app_configs() if Path(config.path).is_relative_to(ROOT)
        and ".venv" not in Path(config.path).parts
    }  # fmt: skip
    assert ours <= set(APPS_FROM_BELOW)


# Errors of the machinery, not of a person's input: whoever opens the shop or runs its jobs meets them.
MACHINERY = {"CannotOpen", "JobCancelled", "LeaseLost", "FactChanged", "EditionError"}


def walk(error: type[Exception]) -> Iterator[type[Exception]]:
    for below in error.__subclasses__():
        yield below
        yield from walk(below)


def errors_of_ours() -> dict[str, type[Exception]]:
    """Every class of error that a module of ours defines, by its whole name."""
    found = {}
    for path in python_files("shop", "bottles", "tuning"):
        if path.name == "wsgi.py" or "migrations" in path.parts:
            continue
        name = relative(path).removesuffix(".py").removesuffix("/__init__").replace("/", ".")
        for thing in vars(importlib.import_module(name)).values():
            if isinstance(thing, type) and issubclass(thing, Exception) and thing.__module__ == name:
                found[f"{name}.{thing.__name__}"] = thing
    return found


def test_every_error_of_ours_belongs_to_a_tree():
    from bottles.rules.stamps import StampError
    from shop.base.errors import Refusal
    from shop.physics.errors import PhysicsError

    found = errors_of_ours()
    assert len(found) > 20
    roots = (Refusal, PhysicsError, StampError)
    loose = {
        name for name, error in found.items() if not issubclass(error, roots) and name.rpartition(".")[2] not in MACHINERY
    }
    assert loose == set()


def test_each_refusal_has_a_code_of_its_own_and_a_sentence():
    from shop.base.errors import Refusal
    from shop.physics.errors import PhysicsError

    ours = errors_of_ours()  # imports every module, so that the trees are whole
    for root in (Refusal, PhysicsError):
        below = [error for error in ours.values() if issubclass(error, root)]
        assert set(below) == {root, *walk(root)}
        codes = [error.code for error in below]
        assert len(codes) == len(set(codes))
        assert all("code" in vars(error) for error in below)
        assert all(error.__doc__ and error.__doc__.strip().endswith(".") for error in below)
