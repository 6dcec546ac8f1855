"""One document of the invented site for all tests that only read it."""

from __future__ import annotations

from datetime import UTC, datetime
from io import BytesIO

import pytest
from pypdf import PdfReader

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.document import pdf_bytes

from .invented import assessment

MADE_AT = datetime(2026, 12, 1, 10, 20, 30, tzinfo=UTC)


@pytest.fixture(scope="session")
def result() -> Assessment:
    return assessment()


@pytest.fixture(scope="session")
def document(result: Assessment) -> bytes:
    return pdf_bytes(result, "A4", MADE_AT)


@pytest.fixture(scope="session")
def reader(document: bytes) -> PdfReader:
    return PdfReader(BytesIO(document))


@pytest.fixture(scope="session")
def pages(reader: PdfReader) -> list[str]:
    """Text of each page."""
    return [page.extract_text() for page in reader.pages]


@pytest.fixture(scope="session")
def text(pages: list[str]) -> str:
    """All text, every run of spaces and line ends a single space."""
    return " ".join(" ".join(pages).split())
