"""Run a command for scripts here or in a process of its own, and read the one thing that it says."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

from django.conf import settings
from django.core.management import load_command_class

MANAGE = Path(settings.BASE_DIR) / "manage.py"
OBJECT = {
    "moved_kg", "receiver_final_kg", "source_left_kg", "source_final_c", "receiver_final_c", "source_final_bar",
    "receiver_final_bar", "stopped_by", "liquid_out",
}  # fmt: skip
KEYS = {
    "transfer": {
        "mixed", "wall_condensing", "held", "low_kg", "likely_kg", "high_kg", "line_loss_kg", "warmest_receiver_c",
        "least_source_kg", "full_fills", "warnings",
    },
    "contents": {
        "region", "least_kg", "most_kg", "most_if_overfilled_kg", "saturation_bar", "liquid_kg", "vapour_kg", "warnings",
    },
    "heat": {"temperature_c", "energy_kj", "minutes", "one_phase_at_c", "becomes", "pressure_at_55c_bar", "warnings"},
}  # fmt: skip
TRANSFER = {
    "source-capacity": "29L", "source-wall": "steel", "source-wall-mass": "32kg", "source-net": "19.72kg",
    "source-temperature": "20C", "receiver-capacity": "6.8L", "receiver-wall": "aluminium",
    "receiver-wall-mass": "5.9kg", "receiver-temperature": "-10C",
}  # fmt: skip
CONTENTS = {"capacity": "29L", "temperature": "20C", "pressure": "49.5bar"}
HEAT = {
    "capacity": "6.8L", "net": "4.5kg", "wall": "aluminium", "wall-mass": "5.9kg", "temperature": "15C",
    "to-pressure": "62bara", "watts": "300", "ambient": "15C", "loss": "3",
}  # fmt: skip
GIVEN = {"transfer": TRANSFER, "contents": CONTENTS, "heat": HEAT}


def read(text: str) -> dict[str, Any]:
    """Read strict JSON: neither NaN nor Infinity, nothing before or behind it."""

    def refuse(constant: str) -> None:
        raise AssertionError(f"{constant} isn't JSON")

    told = json.loads(text, parse_constant=refuse)
    assert isinstance(told, dict)
    return told


def words(name: str, **changed: str | None) -> list[str]:
    """The command's options as a shell hands them over; None leaves one out."""
    given: dict[str, str | None] = GIVEN[name] | {key.replace("_", "-"): value for key, value in changed.items()}
    return [word for key, value in given.items() if value is not None for word in (f"--{key}", value)]


def run(name: str, *typed: str) -> tuple[int, dict[str, Any]]:
    """Run it in this process, as manage.py does: its exit code and what it said."""
    said = io.StringIO()
    command = load_command_class("bottles", name)
    command.__init__(stdout=said)  # type: ignore[misc]
    try:
        command.run_from_argv(["manage.py", name, *typed])
    except SystemExit as end:
        return int(end.code or 0), read(said.getvalue())
    return 0, read(said.getvalue())


def answer(name: str, *more: str, **changed: str | None) -> dict[str, Any]:
    """What it answers, where it must answer."""
    code, told = run(name, *words(name, **changed), *more)
    assert code == 0, told
    return told


def refusal(name: str, *more: str, **changed: str | None) -> str:
    """The code of its refusal, where it must refuse."""
    code, told = run(name, *words(name, **changed), *more)
    assert (code, set(told)) == (2, {"error", "sentence"}), told
    assert told["sentence"].endswith(".")
    return str(told["error"])


def codes(told: dict[str, Any]) -> set[str]:
    """Codes of the warnings, each of which has its sentence."""
    assert all(set(warning) == {"code", "sentence"} and warning["sentence"].endswith(".") for warning in told["warnings"])
    return {warning["code"] for warning in told["warnings"]}


def bare(home: Path, **more: str) -> dict[str, str]:
    """An environment with nothing of the shop in it."""
    ours = ("TAREBOOK_", "DATABASE_URL", "DJANGO_", "PYTHON")
    clean = {key: value for key, value in os.environ.items() if not key.startswith(ours)}
    return clean | {"HOME": str(home), "PYTHONDONTWRITEBYTECODE": "1"} | more


def in_a_process(home: Path, *typed: str, **env: str) -> subprocess.CompletedProcess[str]:
    """Run manage.py from an empty folder, in an environment with nothing of the shop in it."""
    return subprocess.run(
        [sys.executable, str(MANAGE), *typed],
        cwd=home, env=bare(home, **env), capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
