"""Every function of physics says what it takes and gives, in which unit, and where it's from."""

import ast
import inspect
import re
import textwrap

import pytest

from tests.test_architecture import python_files, relative

SECTIONS = ("Parameters", "Returns", "Assumptions", "Valid for", "Raises", "References")
UNIT = re.compile(r"\[[^\]\n]+\]")


def functions() -> list[tuple[str, ast.FunctionDef]]:
    found = []
    for path in python_files("shop/physics", "bottles/physics"):
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
                found.append((f"{relative(path)}:{node.name}", node))
    return found


def sections(docstring: str) -> dict[str, str]:
    """Cut a docstring at its underlined headings."""
    parts = re.split(r"^([A-Z][A-Za-z ]+)\n-{3,}\n", inspect.cleandoc(docstring) + "\n", flags=re.MULTILINE)
    return {"": parts[0]} | dict(zip(parts[1::2], parts[2::2], strict=True))


def parameters(node: ast.FunctionDef) -> list[str]:
    every = [*node.args.posonlyargs, *node.args.args, *node.args.kwonlyargs]
    return [arg.arg for arg in every]


def entries(section: str) -> dict[str, str]:
    """Give each entry of a Parameters section: the names at its head, and all of its text."""
    out: dict[str, str] = {}
    names: list[str] = []
    for line in section.splitlines():
        if line and not line.startswith(" "):
            names = [name.strip().lstrip("*") for name in line.partition(":")[0].split(",")]
        for name in names:
            out[name] = out.get(name, "") + line + "\n"
    return out


def faults(node: ast.FunctionDef) -> list[str]:
    parts = sections(ast.get_docstring(node, clean=False) or "")
    found = [f"no section {name}" for name in SECTIONS if not parts.get(name, "").strip()]
    if not parts[""].strip().partition("\n\n")[0].endswith("."):
        found.append("doesn't begin with a sentence")
    told = entries(parts.get("Parameters", ""))
    for name in parameters(node):
        if name not in told:
            found.append(f"{name} isn't described")
        elif not UNIT.search(told[name]):
            found.append(f"{name} has no [unit]")
    nothing = node.returns is not None and ast.unparse(node.returns) == "None"
    if not nothing and not UNIT.search(parts.get("Returns", "")):
        found.append("what it returns has no [unit]")
    return found


@pytest.mark.parametrize("node", [pytest.param(node, id=name) for name, node in functions()])
def test_a_function_of_physics_is_described(node):
    assert faults(node) == []


def test_the_check_of_descriptions_sees_what_is_missing():
    bad = ast.parse(
        textwrap.dedent(
            '''
            def pull(mass, *, height):
                """Weigh something

                Parameters
                ----------
                mass : float
                    Of the thing.

                Returns
                -------
                float
                    Its pull.
                """
            '''
        )
    ).body[0]
    assert isinstance(bad, ast.FunctionDef)
    assert faults(bad) == [
        "no section Assumptions", "no section Valid for", "no section Raises", "no section References",
        "doesn't begin with a sentence", "mass has no [unit]", "height isn't described",
        "what it returns has no [unit]",
    ]  # fmt: skip
