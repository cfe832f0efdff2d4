"""Files to sources: grouping, globs, ids, and what is refused."""

from __future__ import annotations

import datetime as dt
import gzip
import tomllib
from pathlib import Path
from typing import Any

import pytest
from tests.start.tables import (
    NOW,
    csv,
    drafted,
    guess_of,
    noise,
    only,
    only_source,
    stamps,
    started,
)

from holdsteady import cli
from holdsteady.problems import SettingsError
from holdsteady.start.draft import Draft
from holdsteady.start.start import start, system_zone


def bore(count: int = 30, *, seed: int = 1, **more: object) -> str:
    columns: dict[str, Any] = {"stamp": stamps(count), "bore_mm": noise(count, seed=seed)}
    for name, cell in more.items():
        columns[name] = cell if isinstance(cell, list) else [cell] * count
    return csv(columns)


def torque(count: int = 30) -> str:
    return csv({"stamp": stamps(count), "torque": noise(count, mean=1.8, decimals=2)})


def globs(draft: Draft) -> dict[str, tuple[str, ...]]:
    return {source.id: source.files for source in draft.sources}


def test_a_folder_of_one_kind(tmp_path: Path) -> None:
    draft = drafted(tmp_path, {"press/2026-01.csv": bore(), "press/2026-02.csv": bore()})
    assert globs(draft) == {"press": ("press/*.csv",)}
    one = only(draft)
    assert (one.id, one.title, one.area) == ("bore", "Bore", "Press")
    assert one.value("value") == "bore_mm"
    assert one.value("unit") == "mm"
    assert one.value("decimals") == 3


def test_kinds_in_one_folder_are_told_apart_by_their_names(tmp_path: Path) -> None:
    draft = drafted(
        tmp_path, {"lab/bore 2026-01.csv": bore(), "lab/bore 2026-02.csv": bore(), "lab/torque.csv": torque()}
    )
    assert globs(draft) == {"bore": ("lab/bore *.csv",), "torque": ("lab/torque*.csv",)}


def test_folders_for_years_are_one_source(tmp_path: Path) -> None:
    draft = drafted(tmp_path, {"2025/press.csv": bore(), "2026/press.csv": bore()})
    assert [source.files for source in draft.sources] == [("*/*.csv",)]


def test_machines_in_a_folder_each_that_a_column_tells_apart(tmp_path: Path) -> None:
    draft = drafted(tmp_path, {"p1/a.csv": bore(press=1), "p2/a.csv": bore(press=2, seed=2)})
    source = only_source(draft)
    assert source.files == ("p1/*.csv", "p2/*.csv")
    assert source.characteristics[0].value("each") == ("press",)


def test_machines_that_no_column_tells_apart_stay_apart(tmp_path: Path) -> None:
    draft = drafted(tmp_path, {"p1/a.csv": bore(), "p2/a.csv": bore(seed=2)})
    assert globs(draft) == {"p1": ("p1/*.csv",), "p2": ("p2/*.csv",)}
    ids = [one.id for source in draft.sources for one in source.characteristics]
    assert len(set(ids)) == 2
    draft = drafted(tmp_path / "x", {"press 1.csv": bore(), "press 2.csv": bore(seed=2)})
    assert [source.files for source in draft.sources] == [("press 1*.csv",), ("press 2*.csv",)]


def test_numbered_exports_that_follow_each_other_are_one(tmp_path: Path) -> None:
    lines = bore(60).splitlines(keepends=True)
    files = {"export 1.csv": "".join(lines[:31]), "export 2.csv": lines[0] + "".join(lines[31:])}
    assert [source.files for source in drafted(tmp_path, files).sources] == [("*.csv",)]


def test_files_that_lack_or_add_a_column_belong_together(tmp_path: Path) -> None:
    draft = drafted(
        tmp_path, {"p/2026-01.csv": bore(lot="A"), "p/2026-02.csv": bore(), "p/2026-03.csv": bore(lot="B")}
    )
    assert globs(draft) == {"p": ("p/*.csv",)}


def test_names_that_a_glob_would_take_for_signs(tmp_path: Path) -> None:
    files = {
        "[a]*?/x 1.csv": bore(),
        "b/#%?,'.csv": torque(),
        'q"uo\\te/é\n.csv': csv({"v": noise(20), "w": noise(20)}),
    }
    draft = drafted(tmp_path, files)
    assert len(draft.sources) == 3
    report = cli.run(["check", str(tmp_path), "--as-of", "2026-03-17"])
    assert report == 0


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "cp1252"])
def test_encodings(encoding: str, tmp_path: Path) -> None:
    text = csv({"stamp": stamps(30), "Länge [mm]": noise(30)}, ";")
    one = only(drafted(tmp_path, {"a.csv": text.encode(encoding)}))
    assert (one.id, one.title, one.value("unit")) == ("lange", "Länge", "mm")


def test_packed_files(tmp_path: Path) -> None:
    draft = drafted(tmp_path, {"p/a 2026-01.csv.gz": gzip.compress(bore().encode())})
    assert globs(draft) == {"p": ("p/*.csv.gz",)}


def test_files_without_a_table_are_left_out_and_named(tmp_path: Path) -> None:
    files: dict[str, str | bytes] = {
        "p/a.csv": bore(),
        "p/b.csv": b"",
        "p/c.csv": b"\x89PNG\r\n\x1a\n" + bytes(200),
        "p/d.txt": "just words\n",
    }
    draft = drafted(tmp_path, files)
    assert globs(draft) == {"p": ("p/*.csv",)}
    left = dict(draft.left)
    assert left["p/b.csv"] == "empty"
    assert "picture" in left["p/c.csv"]
    assert set(left) == {"p/b.csv", "p/c.csv", "p/d.txt"}
    assert "p/d.txt" in (tmp_path / "holdsteady.toml").read_text(encoding="utf-8")


def test_a_line_of_many_columns(tmp_path: Path) -> None:
    many = {
        f"temperature {chr(97 + index // 26)}{chr(97 + index % 26)}": noise(20, seed=index)
        for index in range(600)
    }
    long = {f"{name} {'x' * 200}": cells for name, cells in many.items()}
    draft = drafted(tmp_path, {"a.csv": csv({"stamp": stamps(20), **long})})
    assert len(only_source(draft).characteristics) == 500
    assert any("600 columns could be charted" in note for note in only_source(draft).notes)


def test_missing_codes_are_written_with_what_was_seen(tmp_path: Path) -> None:
    cells = noise(40)
    cells[5] = cells[20] = "-999"
    cells[7] = "n/a"
    draft = drafted(tmp_path, {"a.csv": csv({"stamp": stamps(40), "bore": cells})})
    guess = guess_of(only_source(draft), "missing")
    assert guess is not None
    assert set(guess.value) == {"-999", "n/a"}  # type: ignore[arg-type]
    assert "-999 2 times in bore" in guess.why
    assert ["n/a" in row for row in guess.rows] == ["-999" not in row for row in guess.rows]
    text = (tmp_path / "holdsteady.toml").read_text(encoding="utf-8")
    assert "take out what is a value" in text


def test_a_code_that_another_column_measures_is_not_proposed(tmp_path: Path) -> None:
    cells = noise(40)
    cells[5] = "9999"
    other = noise(40, mean=10_000, sigma=200, decimals=0)
    draft = drafted(tmp_path, {"a.csv": csv({"stamp": stamps(40), "bore": cells, "load": other})})
    assert guess_of(only_source(draft), "missing") is None
    assert any("9999 looks like a missing code" in note for note in only_source(draft).notes)


def test_an_unproven_decimal_mark_is_said(tmp_path: Path) -> None:
    draft = drafted(
        tmp_path, {"a.csv": csv({"stamp": stamps(40), "bore": [f"1,{x[3:]}" for x in noise(40)]}, "\t")}
    )
    guess = guess_of(only_source(draft), "decimal")
    assert guess is not None
    assert guess.confidence == "guess"


def test_the_long_form(tmp_path: Path) -> None:
    rows = 90
    values = [noise(1, mean=(12, 80, 3.5)[index % 3], seed=index)[0] for index in range(rows)]
    text = csv({"stamp": stamps(rows), "feature": ["bore", "mass", "wall"] * 30, "value": values})
    source = only_source(drafted(tmp_path, {"cmm.csv": text}))
    assert [(one.id, one.value("where")) for one in source.characteristics] == [
        ("bore", {"feature": "bore"}),
        ("mass", {"feature": "mass"}),
        ("wall", {"feature": "wall"}),
    ]


def test_the_day_it_was_taken_up(tmp_path: Path) -> None:
    fresh = csv(
        {"stamp": ["2026-03-17 06:00", "2026-03-17 07:00", "2026-03-17 08:00"], "v": ["1.5", "1.6", "1.4"]}
    )
    site = drafted(tmp_path / "fresh", {"a.csv": fresh}).site
    assert (site.watch_from, site.as_of) == (NOW.date(), None)
    site = drafted(tmp_path / "old", {"a.csv": bore(6)}).site
    assert site.watch_from == dt.date(2026, 1, 6)
    assert site.as_of == dt.datetime(2026, 1, 6, 22, 1)  # noqa: DTZ001  by the plant's clock
    assert "\n# as_of = 2026-01-06T22:01:00\n" in (tmp_path / "old/holdsteady.toml").read_text(
        encoding="utf-8"
    )
    assert drafted(tmp_path / "none", {"a.csv": csv({"v": noise(20)})}).site.watch_from == NOW.date()


def test_title_from_the_folder_and_output_beside_what_is_there(tmp_path: Path) -> None:
    draft = drafted(tmp_path / "press_hall 2", {"a.csv": bore(), "site/notes.csv": torque()})
    assert draft.site.title == "Press hall 2"
    assert draft.site.output == "holdsteady-site"
    assert len(draft.sources) == 2


def test_the_zone_is_the_systems_where_it_tells_one(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TZ", ":Europe/Lisbon")
    assert system_zone()[0] == "Europe/Lisbon"
    monkeypatch.setenv("TZ", "no/such")
    monkeypatch.setattr("holdsteady.start.start._ZONE_FILES", (Path("/no/such"), Path("/no/such")))
    name, why = system_zone()
    assert name == "UTC"
    assert "Europe/Lisbon" in why


class TestRefused:
    def fails(self, folder: Path) -> str:
        with pytest.raises(SettingsError) as failed:
            start(folder, now=NOW, zone="UTC")
        (problem,) = failed.value.problems
        assert problem.remedy
        assert failed.value.exit_code == 2
        assert not (folder / "holdsteady.toml").exists()
        return str(problem)

    def test_no_folder(self, tmp_path: Path) -> None:
        assert "no folder" in self.fails(tmp_path / "none")

    def test_nothing_in_it(self, tmp_path: Path) -> None:
        assert "no .csv" in self.fails(tmp_path)

    def test_nothing_that_could_be_charted(self, tmp_path: Path) -> None:
        (tmp_path / "a.csv").write_text("name,town\nA,B\nC,D\n")
        (tmp_path / "b.csv").write_text("x,y\n1,2\n1,2\n1,2\n1,2\n")
        said = self.fails(tmp_path)
        assert "a.csv" in said
        assert "b.csv" in said

    @pytest.mark.parametrize("link", ["", "a link"])
    def test_settings_that_are_there(
        self, link: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
    ) -> None:
        (tmp_path / "a.csv").write_text(bore())
        path = tmp_path / "holdsteady.toml"
        if link:
            path.symlink_to(tmp_path / "nowhere")
        else:
            path.write_text("mine")
        assert cli.run(["start", str(tmp_path)]) == 2
        problem, remedy = capsys.readouterr().err.splitlines()
        assert "nothing is overwritten" in problem
        assert "move it away" in remedy
        assert path.is_symlink() if link else path.read_text() == "mine"

    def test_a_folder_that_cannot_be_written(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        (tmp_path / "a.csv").write_text(bore())
        whole = Path.open

        def refuse(path: Path, mode: str = "r", **more: Any) -> Any:
            if mode == "x":
                raise PermissionError(13, "Permission denied")
            return whole(path, mode, **more)

        monkeypatch.setattr(Path, "open", refuse)
        assert "cannot be written" in self.fails(tmp_path)


def test_what_it_says(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "press").mkdir()
    (tmp_path / "press/a.csv").write_text(bore(press=[1, 2, 3] * 10))
    assert cli.run(["start", str(tmp_path)]) == 0
    streams = capsys.readouterr()
    assert streams.err == ""
    lines = streams.out.splitlines()
    assert lines[0] == "press: press/*.csv"
    each = next(index for index, line in enumerate(lines) if line.strip().startswith("each"))
    assert (
        lines[each].strip() == 'each = ["press"]  likely: 3 values (1, 2, 3), named as a machine or place is'
    )
    assert [line.split(":")[0].strip() for line in lines[each + 1 : each + 3]] == ["press/a.csv"] * 2
    assert lines[-2] == f"Wrote {tmp_path / 'holdsteady.toml'}"
    assert lines[-1].startswith("Next: holdsteady build ")
    written = tomllib.loads((tmp_path / "holdsteady.toml").read_text(encoding="utf-8"))
    assert written["characteristic"][0]["each"] == ["press"]


def test_large_files_are_read_at_both_ends(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("holdsteady.start.sources._MOST_BYTES", 20_000)
    monkeypatch.setattr("holdsteady.start.sources._LEAST_BYTES", 1_000)
    long = csv({"stamp": stamps(2_000, hours=0.5), "bore_mm": noise(2_000)})
    result = started(tmp_path, {"a.csv": long})
    assert "of them looked at" in result.draft.sources[0].seen
    assert result.draft.site.watch_from == dt.date(2026, 2, 15)  # the day of the last of the 2,000 rows
