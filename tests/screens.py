"""Opening a page of the app without a browser, and reading what it says."""

from __future__ import annotations

import re
from pathlib import Path

from streamlit.testing.v1 import AppTest

from planner.wording import NO_BREAK, THIN

ROOT = Path(__file__).resolve().parents[1]
PAGES = tuple(sorted(path.stem for path in (ROOT / "pages").glob("*.py")))
_TAG = re.compile(r"<[^>]*>")


def open_page(stem: str) -> AppTest:
    """The page, run once by way of the entry as in use; PLANNER_STORE names the store."""
    at = AppTest.from_file(str(ROOT / "planner" / "app.py"), default_timeout=30).run()
    return at.switch_page(f"../pages/{stem}.py").run()


def html_of(at: AppTest) -> list[str]:
    """Every HTML element but the style sheet, as sent."""
    bodies = [str(element.proto.body) for element in at.get("html")]
    return [body for body in bodies if not body.startswith("<style")]


def said(at: AppTest) -> str:
    """All that the page says in text, with plain spaces and without tags."""
    texts = [_TAG.sub(" ", body) for body in html_of(at)]
    texts += [element.value for element in (*at.markdown, *at.caption, *at.text, *at.info, *at.warning)]
    return " ".join(" ".join(texts).replace(NO_BREAK, " ").replace(THIN, " ").split())


def first_line(at: AppTest) -> str:
    """The page's answer: its first and only heading."""
    headings = re.findall(r'<h1 class="p-answer">(.*?)</h1>', " ".join(html_of(at)))
    assert len(headings) == 1
    return headings[0].replace(NO_BREAK, " ").replace(THIN, " ")


def press(at: AppTest, label: str) -> AppTest:
    """Press the first button with this label."""
    next(button for button in at.button if button.label == label).click()
    return at.run()
