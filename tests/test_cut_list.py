"""The list says the blank's numbers, read back from text and CSV."""

from __future__ import annotations

import csv
import io

import numpy as np
import pytest

from models import Build, Reflectors
from optim.cut_list import cut_list_csv, cut_list_text, pieces_of

BUILD = Build(sheet_thickness=2e-3)


def _design(angle_deg: float, width: float = 0.345) -> Reflectors:
    return Reflectors(
        apex_angle=np.radians(angle_deg),
        spacing=0.173,
        plate_width=width,
        plate_length=0.4,
        dipole_length=0.1625,
        dipole_diameter=0.006,
    )


def test_text_states_blank_bend_and_assumptions() -> None:
    text = cut_list_text(_design(70.0), BUILD, name="most_margin")
    assert "most margin" in text
    # 110° bend: 690 − 2·2·tan 55° + 1.9199·2.84 = 689.7 mm.
    assert "1 × 689.7 × 400.0" in text
    assert "bend by 110.00° to an angle of 70.00°" in text
    assert "0.42 of the thickness" in text
    assert "rod ⌀ 6, 162.5 end to end; two halves" in text
    assert "folded" in cut_list_text(_design(70.0), BUILD, name="x", folded=True)
    assert "2 × 345.0 × 400.0" in text


def test_csv_reads_back() -> None:
    rows = list(csv.DictReader(io.StringIO(cut_list_csv(_design(90.0), BUILD))))
    bent = [row for row in rows if row["part"] == "bent from one sheet"]
    assert [row["sheet_mm"] for row in bent] == ["1000 x 2000", "1250 x 2500", "1500 x 3000"]
    # Five of 690.5 × 400 on one sheet of 1 × 2 m, by hand: 1.381 m² of 2 m².
    assert int(bent[0]["pieces_a_sheet"]) == 5
    assert float(bent[0]["share_used"]) == pytest.approx(5 * 0.690461 * 0.4 / 2.0, abs=1e-3)
    assert float(bent[0]["bend_deg"]) == 90.0
    assert rows[-1]["part"] == "dipole"
    assert float(rows[-1]["length_mm"]) == 162.5


def test_what_cannot_be_bent_or_does_not_fit_is_said() -> None:
    narrow = _design(5.0, width=0.045)
    assert list(pieces_of(narrow, BUILD)) == ["cut as two plates"]
    assert "its bend would take up the plates" in cut_list_text(narrow, BUILD, name="x")
    assert "does not fit on a sheet of 1000 x 2000" in cut_list_text(
        _design(90.0, width=1.6), BUILD, name="x"
    )
    assert "stays flat" in cut_list_text(_design(180.0), BUILD, name="x")
