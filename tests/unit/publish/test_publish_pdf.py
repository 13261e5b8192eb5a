"""Run sheets as PDF. Outside check: poppler (pdfinfo, pdftotext, pdftoppm) reads what was made."""

from __future__ import annotations

import shutil
import subprocess
import sys
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from georoute.errors import OutputError
from georoute.publishing import publish
from tests.conftest import absent
from tests.publish_helpers import HOSTILE, hostile_plan, sample_plan, with_late_stop

ISSUED = datetime(2026, 3, 1, 17, 5, tzinfo=UTC)


def poppler(tool: str, *words: object) -> bytes:
    found = shutil.which(tool)
    if found is None:
        absent("browser", f"{tool} (poppler-utils) is not installed")
    done = subprocess.run([str(found), *map(str, words)], capture_output=True, check=True)
    return done.stdout


def squeezed(path: Path) -> str:
    return "".join(poppler("pdftotext", "-layout", path, "-").decode().split())


@pytest.fixture(scope="module")
def sheet(tmp_path_factory: pytest.TempPathFactory) -> Path:
    pages = publish(
        with_late_stop(sample_plan()), tmp_path_factory.mktemp("pdf"), issued=ISSUED, pdf=True
    )
    assert [page.name for page in pages[2:4]] == [
        "sheet_2026-03-02_insp-1.html",
        "sheet_2026-03-02_insp-1.pdf",
    ]
    return pages[3]


def test_every_page_carries_caution_day_and_number(sheet: Path) -> None:
    pages = poppler("pdftotext", "-layout", sheet, "-").decode().rstrip("\f").split("\f")
    assert len(pages) >= 2
    for number, page in enumerate(pages, start=1):
        text = "".join(page.split())
        assert "Readorchangetheplanonlywhileparked." in text
        assert "Locallaw,youremployer'srulesandlicensedpracticeprevail." in text
        assert f"{number}/{len(pages)}" in text
        assert "Monday2March2026" in text or number == len(pages)
    everything = "".join("".join(pages).split())
    assert all(f"S00-{stop:02d}" in everything for stop in range(15))
    assert "late22min" in everything


def test_pdf_runs_nothing_and_leads_nowhere(sheet: Path) -> None:
    told = dict(
        line.split(":", 1)
        for line in poppler("pdfinfo", sheet).decode().splitlines()
        if ":" in line
    )
    assert told["JavaScript"].strip() == "no"
    assert told["Encrypted"].strip() == "no"
    assert told["Page size"].strip().startswith("595.276 x 841.89")
    assert "CreationDate" not in told
    assert poppler("pdfinfo", "-url", sheet).decode().count("http") == 0


def test_sketch_is_drawn_in_hue_and_ink(sheet: Path, tmp_path: Path) -> None:
    # a sketch without its colours is black boxes: the style sheet of the page does not reach it
    poppler("pdftoppm", "-r", 72, "-f", 1, "-l", 1, sheet, tmp_path / "page")
    image = next(tmp_path.glob("page*.ppm")).read_bytes()
    wide, high = (int(n) for n in image.split(b"\n", 2)[1].split())
    pixels = np.frombuffer(image[-wide * high * 3 :], np.uint8).reshape(high, wide, 3).astype(int)
    area = pixels[int(high * 0.22) : int(high * 0.52)]

    def share(red: int, green: int, blue: int) -> float:
        return float((np.abs(area - (red, green, blue)).max(axis=2) < 40).mean())

    assert share(0xFF, 0xFF, 0xFF) > 0.8
    assert share(0x00, 0x72, 0xB2) > 0.0005  # the inspector's hue
    assert share(0xD5, 0x5E, 0x00) > 0.0001  # the rim of the late plate
    assert share(0x1E, 0x1E, 0x1E) > 0.002


def test_same_plan_gives_the_same_pdf_in_another_process(sheet: Path, tmp_path: Path) -> None:
    code = (
        "import sys; from datetime import UTC, datetime; from georoute.publishing import publish\n"
        "from tests.publish_helpers import sample_plan, with_late_stop\n"
        "publish(with_late_stop(sample_plan()), sys.argv[1], pdf=True, "
        "issued=datetime(2026, 3, 1, 17, 5, tzinfo=UTC))"
    )
    root = Path(__file__).resolve().parents[3]
    subprocess.run([sys.executable, "-c", code, str(tmp_path)], check=True, cwd=root)
    assert (tmp_path / sheet.name).read_bytes() == sheet.read_bytes()


def test_hostile_text_is_text_in_the_pdf(tmp_path: Path) -> None:
    pages = publish(hostile_plan(), tmp_path, pdf=True)
    made = next(page for page in pages if page.suffix == ".pdf")
    printed = squeezed(made)
    assert [text for text in HOSTILE if "".join(text.split()) not in printed] == []
    assert b"/JavaScript" not in made.read_bytes()
    assert poppler("pdfimages", "-list", made).count(b"\n") == 2  # the two lines of its head


def test_stale_pdfs_of_the_same_plan_go_and_strangers_stay(tmp_path: Path) -> None:
    wide = sample_plan(days=2, stops=2)
    publish(wide, tmp_path, pdf=True)
    mine = tmp_path / "sheet_2025-01-01_mine.pdf"
    mine.write_bytes(b"%PDF-1.7 somebody's own")
    left = publish(replace(wide, tours=wide.tours[:1]), tmp_path)
    # an old PDF beside a new page would carry old times
    assert sorted(tmp_path.iterdir()) == sorted([*left, mine])
    stranger = tmp_path / "sheet_2026-03-02_insp-1.pdf"
    stranger.write_bytes(b"%PDF-1.7 somebody's own")
    with pytest.raises(OutputError, match=r"did not make: sheet_2026-03-02_insp-1\.pdf"):
        publish(wide, tmp_path, pdf=True)
    assert stranger.read_bytes() == b"%PDF-1.7 somebody's own"


def test_without_the_extra_the_remedy_is_told_and_nothing_is_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, "weasyprint", None)
    with pytest.raises(OutputError, match=r"pip install 'georoute\[pdf\]'"):
        publish(sample_plan(stops=2), tmp_path / "maps", pdf=True)
    assert not (tmp_path / "maps").exists()
    assert publish(sample_plan(stops=2), tmp_path / "maps")
