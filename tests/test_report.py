"""The report as a file: what is on it, that texts cannot harm it, that it is made again alike."""

import base64
import hashlib
import json
import re
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest

from optim.faults import SpecError
from optim.report import embedded, make_report
from tests.report_runs import HOSTILE, finished, missed

MOST_BYTES = 4_000_000


class Outline(HTMLParser):
    """The elements of a page, as a parser of the HTML standard sees them."""

    def __init__(self, html: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.texts: dict[str, list[str]] = {}
        self._open = ""
        self.feed(html)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))
        self._open = tag

    def handle_data(self, data: str) -> None:
        self.texts.setdefault(self._open, []).append(data)

    def all(self, tag: str) -> list[dict[str, str | None]]:
        return [attributes for name, attributes in self.elements if name == tag]


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return finished(tmp_path_factory.mktemp("met"))


@pytest.fixture(scope="module")
def html(folder: Path) -> str:
    return (folder / "report.html").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def data(html: str) -> Any:
    found = re.search(r'<script type="application/json" id="data">(.*?)</script>', html, re.DOTALL)
    assert found
    return json.loads(found[1])


def test_sections_and_contents(html: str) -> None:
    page = Outline(html)
    places = [section["id"] for section in page.all("section")]
    assert {"asked", "front", "recommended", "search", "method", "cautions", "files"} <= set(places)
    targets = {str(a["href"])[1:] for a in page.all("a") if str(a["href"]).startswith("#")}
    assert targets <= set(places)
    text = " ".join(t for texts in page.texts.values() for t in texts)
    for words in ("Power lines", "Lightning", "Radio exposure", "licensed practice decide", "ice"):
        assert words in text


def test_names_of_elements_are_given_once(html: str) -> None:
    names = [a["id"] for _, a in Outline(html).elements if "id" in a]
    assert len(names) == len(set(names))


def test_texts_of_a_user_stay_texts(html: str) -> None:
    page = Outline(html)
    assert HOSTILE in "".join(page.texts["title"])
    assert HOSTILE in "".join(page.texts["h1"])
    assert len(page.all("script")) == 3
    assert page.all("img") == []
    assert not any(name.startswith("on") for _, attributes in page.elements for name in attributes)


def test_data_in_a_script_cannot_end_it() -> None:
    text = embedded({"title": "</script><!-- & \u2028"})
    assert not set(text) & set("<>&\u2028")
    assert json.loads(text) == {"title": "</script><!-- & \u2028"}


def test_policy_lets_only_the_pages_own_scripts_run(html: str) -> None:
    (policy,) = [
        str(meta["content"])
        for meta in Outline(html).all("meta")
        if meta.get("http-equiv") == "Content-Security-Policy"
    ]
    assert "default-src 'none'" in policy
    assert "unsafe-eval" not in policy
    scripts = re.findall(r"<script>(.*?)</script>", html, re.DOTALL)
    assert len(scripts) == 2
    for script in scripts:
        digest = base64.b64encode(hashlib.sha256(script.encode()).digest()).decode()
        assert f"'sha256-{digest}'" in policy


def test_links_lead_into_the_folder(folder: Path, html: str) -> None:
    page = Outline(html)
    links = [str(a["href"]) for a in page.all("a") if not str(a["href"]).startswith("#")]
    assert {"front.csv", "summary.json", "journal.jsonl", "recommended/smallest.toml"} <= set(links)
    for link in links:
        assert (folder / link).resolve().is_relative_to(folder.resolve())
        assert (folder / link).is_file()
    assert [link["href"] for link in page.all("link")] == ["data:,"]


def test_every_design_has_its_cuts_curves_and_drawing(folder: Path, data: Any) -> None:
    count = len((folder / "front.csv").read_text().splitlines()) - 1
    assert count > 3
    for part in (data["roles"], data["sketches"], data["cuts"]["h"], data["cuts"]["e"]):
        assert len(part) == count
    assert all(len(cut) == 91 and cut[0] == 0 for cut in data["cuts"]["h"])
    assert all(len(curves) == count for curves in data["band"].values())
    assert len(set(data["sketches"])) > count / 2


def test_numbers_are_those_of_the_tables(folder: Path, data: Any) -> None:
    summary = json.loads((folder / "summary.json").read_text())
    named = {q["key"]: q["values"] for q in data["quantities"]}
    for entry in summary["recommended"]:
        row = data["roles"].index(entry["role"].replace("_", " "))
        assert named["directivity_dbi"][row] == pytest.approx(
            entry["figures"]["directivity_dbi"], abs=1e-4
        )
        assert named["frontal_area"][row] == pytest.approx(entry["sizes"]["frontal_area_m2"])
        assert named["spacing_mm"][row] == entry["dimensions"]["spacing_mm"]


def test_a_match_that_the_model_cannot_give_is_not_shown(data: Any) -> None:
    assert not {"vswr", "reactance_ohm", "realized_gain_dbi"} & {
        q["key"] for q in data["quantities"]
    }


def test_the_same_folder_gives_the_same_bytes(folder: Path, html: str) -> None:
    assert len(html.encode()) < MOST_BYTES
    make_report(folder)
    assert (folder / "report.html").read_text(encoding="utf-8") == html
    assert not re.search(r"20\d\d-\d\d-\d\d", html.partition("<script")[0])


def test_not_met_has_a_report_too(tmp_path: Path) -> None:
    html = (missed(tmp_path) / "report.html").read_text(encoding="utf-8")
    page = Outline(html)
    assert "Not met" in "".join(page.texts["strong"])
    said = " ".join(page.texts["li"])
    assert "Relax half-power beamwidth" in said or "Relax beamwidth_h_deg.max from 40 to" in said
    assert "gain ≥ 12.2 dBi" in html
    assert "✗" in html


def test_a_folder_without_a_run_is_told(tmp_path: Path) -> None:
    with pytest.raises(SpecError, match=r"found\.json: .* allowed: the folder of a finished"):
        make_report(tmp_path)
