"""A picture of every open page where a test fails."""

from __future__ import annotations

import re
import tempfile
from collections.abc import Generator
from pathlib import Path

import pytest
from playwright.sync_api import Error


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """Say in the failure where the pictures lie."""
    report = yield
    browser = getattr(item, "funcargs", {}).get("chromium")
    if report.when == "call" and report.failed and browser is not None:
        folder = Path(tempfile.mkdtemp(prefix="tarebook_pages_"))
        name = re.sub(r"\W+", "_", item.name)
        for number, page in enumerate(page for context in browser.contexts for page in context.pages):
            try:
                page.screenshot(path=folder / f"{name}_{number}.png", full_page=True, timeout=5_000)
                (folder / f"{name}_{number}.html").write_text(
                    f"<!-- {page.url} -->\n{page.content()}", encoding="utf-8"
                )
            except Error:
                continue  # a page that can't be drawn any more must not hide why
        report.sections.append(("pages", f"pictures of the open pages: {folder}"))
    return report
