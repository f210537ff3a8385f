"""A survey as one self-contained page for a browser, a phone or paper."""

from __future__ import annotations

from lowpoint.survey.page.writing import page_text, write_page

__all__ = ["page_text", "write_page"]
