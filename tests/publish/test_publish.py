"""A site takes the place of the one before, whole, and nothing that is not ours is touched."""

from __future__ import annotations

import errno
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from holdsteady import publish as module
from holdsteady.problems import PublishError, RefusedFolderError, SiteBusyError
from holdsteady.publish import held, publish, refuse_foreign

DAY = 86_400


def site(word: str, *, pages: tuple[str, ...] = ("bore", "length")) -> dict[str, bytes]:
    """A small site: each page names its asset and its neighbours, one reference a line."""
    asset = f"assets/app-{word}.js"
    files = {
        asset: f"// {word}".encode(),
        f"tables/points/{word}.csv": b"panel\n",
        "tables/build.json": os.urandom(8),
    }
    for page in pages:
        files[f"characteristic/{page}.html"] = f"{word}\n{asset}\nsignals.html\nend".encode()
    links = "\n".join(f"characteristic/{page}.html" for page in pages)
    files["signals.html"] = f"{word}\n{asset}\n{links}\nend".encode()
    files["index.html"] = f"{word}\n{asset}\n{links}\nsignals.html\nend".encode()
    return files


def tree(folder: Path) -> dict[str, bytes]:
    return {
        p.relative_to(folder).as_posix(): p.read_bytes()
        for p in folder.rglob("*")
        if p.is_file() and not p.is_symlink()
    }


def visible(folder: Path) -> dict[str, bytes]:
    return {path: content for path, content in tree(folder).items() if not path.startswith(".")}


def check_whole(folder: Path) -> None:
    """Every page is whole, and what it refers to is there."""
    for path, content in visible(folder).items():
        if path.endswith(".html"):
            lines = content.decode().split("\n")
            assert lines[-1] == "end", path
            for reference in lines[1:-1]:
                assert (folder / reference).is_file(), f"{path} refers to {reference}"


class TestFirstPublication:
    def test_every_file_is_there_and_nothing_else(self, tmp_path: Path) -> None:
        files = site("one")
        result = publish(files, tmp_path / "deep" / "site")
        assert visible(tmp_path / "deep" / "site") == files
        assert sorted(path.name for path in (tmp_path / "deep" / "site").iterdir()) == sorted(
            [".holdsteady-site.json", "assets", "characteristic", "index.html", "signals.html", "tables"]
        )
        assert result.written == tuple(sorted(files))
        assert result.kept == result.removed == ()

    def test_an_empty_folder_will_do(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path)
        check_whole(tmp_path)

    def test_the_index_comes_last_and_assets_first(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        placed: list[str] = []
        real = os.replace

        def record(source: Path, target: Path) -> None:
            placed.append(Path(target).relative_to(tmp_path).as_posix())
            real(source, target)

        monkeypatch.setattr(os, "replace", record)
        publish(site("one"), tmp_path)
        pages = [path for path in placed if not path.startswith(".")]
        assert pages[0].startswith("assets/")
        assert pages[-1] == "index.html"
        kinds = [
            "assets" if p.startswith("assets") else "tables" if p.startswith("tables") else "page"
            for p in pages
        ]
        assert kinds == sorted(kinds, key=["assets", "tables", "page"].index)


class TestNextPublication:
    def test_unchanged_files_are_not_written_again(self, tmp_path: Path) -> None:
        files = site("one")
        publish(files, tmp_path)
        before = (tmp_path / "signals.html").stat()
        result = publish(files | {"index.html": b"one\nend"}, tmp_path)
        after = (tmp_path / "signals.html").stat()
        assert (after.st_ino, after.st_mtime_ns) == (before.st_ino, before.st_mtime_ns)
        assert "signals.html" in result.kept
        assert result.written == ("index.html",)

    def test_the_same_site_gives_the_same_folder(self, tmp_path: Path) -> None:
        files = site("one")
        publish(files, tmp_path / "a", now=1.0)
        publish(files | {"tables/build.json": b"another"}, tmp_path / "b", now=2.0)
        publish(files | {"tables/build.json": b"again"}, tmp_path / "b", now=9e9)
        left, right = tree(tmp_path / "a"), tree(tmp_path / "b")
        assert left.pop("tables/build.json") != right.pop("tables/build.json")
        assert left == right

    def test_files_of_the_one_before_stay_for_a_day(self, tmp_path: Path) -> None:
        publish(site("one", pages=("bore", "gone")), tmp_path, now=0.0)
        publish(site("two"), tmp_path, now=1000.0)
        assert publish(site("two"), tmp_path, now=1000.0 + DAY - 1).removed == ()
        assert (tmp_path / "characteristic/gone.html").exists()
        check_whole(tmp_path)
        result = publish(site("two"), tmp_path, now=1000.0 + DAY)
        assert result.removed == ("assets/app-one.js", "characteristic/gone.html", "tables/points/one.csv")
        assert set(visible(tmp_path)) == set(site("two"))

    def test_a_file_needed_again_stays(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path, now=0.0)
        publish(site("two"), tmp_path, now=10.0)
        publish(site("one"), tmp_path, now=20.0)
        result = publish(site("one"), tmp_path, now=10.0 + DAY)
        assert "assets/app-one.js" not in result.removed
        assert (tmp_path / "assets/app-one.js").exists()

    def test_folders_left_empty_are_removed(self, tmp_path: Path) -> None:
        publish({"old/deep/a.html": b"a", "index.html": b"i"}, tmp_path, now=0.0)
        publish({"index.html": b"i"}, tmp_path, now=1.0)
        publish({"index.html": b"i"}, tmp_path, now=2.0 + DAY)
        assert not (tmp_path / "old").exists()

    def test_a_page_that_was_deleted_comes_back(self, tmp_path: Path) -> None:
        files = site("one")
        publish(files, tmp_path)
        (tmp_path / "signals.html").unlink()
        assert "signals.html" in publish(files, tmp_path).written
        check_whole(tmp_path)

    def test_a_page_emptied_by_a_power_cut_is_mended(self, tmp_path: Path) -> None:
        files = site("one")
        publish(files, tmp_path)
        (tmp_path / "signals.html").write_bytes(b"")
        publish(files, tmp_path)
        assert visible(tmp_path) == files


class TestOthersFiles:
    def test_a_folder_with_files_of_others_is_refused(self, tmp_path: Path) -> None:
        (tmp_path / "thesis.txt").write_text("mine")
        with pytest.raises(RefusedFolderError, match="is no published site") as caught:
            publish(site("one"), tmp_path)
        assert caught.value.exit_code == 2
        assert caught.value.problems[0].remedy
        assert tree(tmp_path) == {"thesis.txt": b"mine"}

    def test_a_file_instead_of_a_folder_is_refused(self, tmp_path: Path) -> None:
        (tmp_path / "site").write_text("mine")
        with pytest.raises(RefusedFolderError, match="is a file"):
            publish(site("one"), tmp_path / "site")

    @pytest.mark.parametrize(
        "text", ["", "{", "[]", '{"form": 99}', '{"form": 1, "files": {"../x": {"digests": []}}}']
    )
    def test_a_damaged_list_is_refused(self, tmp_path: Path, text: str) -> None:
        publish(site("one"), tmp_path)
        (tmp_path / ".holdsteady-site.json").write_text(text)
        before = tree(tmp_path)
        with pytest.raises(RefusedFolderError, match="cannot be read"):
            publish(site("two"), tmp_path)
        assert tree(tmp_path) == before

    def test_a_foreign_file_where_a_page_belongs_stops_it(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path)
        (tmp_path / "characteristic/new.html").write_text("mine")
        before = tree(tmp_path)
        with pytest.raises(PublishError, match=r"characteristic/new\.html") as caught:
            publish(site("two", pages=("bore", "new")), tmp_path)
        assert caught.value.exit_code == 5
        assert tree(tmp_path) == before

    def test_a_page_that_someone_changed_is_not_overwritten(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path)
        (tmp_path / "index.html").write_text("moved to another server")
        before = tree(tmp_path)
        with pytest.raises(PublishError, match=r"index\.html"):
            publish(site("two"), tmp_path)
        assert tree(tmp_path) == before

    @pytest.mark.parametrize(
        "kind", ["folder", "link", "file in place of a folder", "link in place of a folder"]
    )
    def test_nothing_else_may_lie_in_the_way(self, tmp_path: Path, kind: str) -> None:
        folder, outside = tmp_path / "site", tmp_path / "outside"
        outside.mkdir()
        publish({"index.html": b"i"}, folder)
        if kind == "folder":
            (folder / "extra/a.html").mkdir(parents=True)
        elif kind == "link":
            (folder / "extra").mkdir()
            (folder / "extra/a.html").symlink_to(outside / "a.html")
        elif kind == "file in place of a folder":
            (folder / "extra").write_text("mine")
        else:
            (folder / "extra").symlink_to(outside)
        with pytest.raises(PublishError, match="extra"):
            publish({"index.html": b"j", "extra/a.html": b"a"}, folder)
        assert list(outside.iterdir()) == []
        assert (folder / "index.html").read_bytes() == b"i"

    def test_old_files_are_not_removed_through_a_link(self, tmp_path: Path) -> None:
        folder, outside = tmp_path / "site", tmp_path / "outside"
        publish({"index.html": b"i", "old/a.html": b"a"}, folder, now=0.0)
        (folder / "old").rename(outside)
        (folder / "old").symlink_to(outside)
        publish({"index.html": b"i"}, folder, now=1.0)
        publish({"index.html": b"i"}, folder, now=2.0 + DAY)
        assert (outside / "a.html").read_bytes() == b"a"

    def test_old_files_that_someone_changed_are_left(self, tmp_path: Path) -> None:
        publish({"index.html": b"i", "a.html": b"a"}, tmp_path, now=0.0)
        (tmp_path / "a.html").write_text("mine now")
        publish({"index.html": b"i"}, tmp_path, now=1.0)
        assert publish({"index.html": b"i"}, tmp_path, now=2.0 + DAY).removed == ()
        assert (tmp_path / "a.html").read_text() == "mine now"

    def test_other_files_in_the_folder_stay(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path, now=0.0)
        (tmp_path / "assets/notes.txt").write_text("mine")
        publish(site("two"), tmp_path, now=1.0)
        publish(site("two"), tmp_path, now=2.0 + DAY)
        assert (tmp_path / "assets/notes.txt").read_text() == "mine"

    def test_a_link_to_a_folder_may_be_the_site_itself(self, tmp_path: Path) -> None:
        (tmp_path / "www").mkdir()
        (tmp_path / "site").symlink_to(tmp_path / "www")
        publish(site("one"), tmp_path / "site")
        check_whole(tmp_path / "www")

    @pytest.mark.parametrize(
        "path", ["../a.html", "/etc/a", "a//b", "a/../b", "c:/a", "a\\b", ".holdsteady-site.json"]
    )
    def test_paths_stay_inside(self, tmp_path: Path, path: str) -> None:
        with pytest.raises(ValueError, match="no path inside a site"):
            publish({path: b"x"}, tmp_path)


class TestLock:
    def test_a_second_build_is_told(self, tmp_path: Path) -> None:
        with held(tmp_path), pytest.raises(SiteBusyError, match="another build") as caught:
            publish(site("one"), tmp_path)
        assert caught.value.exit_code == 4
        publish(site("one"), tmp_path)

    def test_a_lock_dies_with_its_process(self, tmp_path: Path) -> None:
        code = (
            "import os, sys; from pathlib import Path; from holdsteady.publish import held\n"
            "with held(Path(sys.argv[1])): print('held', flush=True); sys.stdin.read(1); os._exit(9)"
        )
        with subprocess.Popen(
            [sys.executable, "-c", code, str(tmp_path)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env=_env(),
        ) as process:
            assert process.stdin
            assert process.stdout
            assert process.stdout.readline() == b"held\n"
            with pytest.raises(SiteBusyError):
                publish(site("one"), tmp_path)
            process.stdin.write(b"x")
            process.stdin.close()
        assert (tmp_path / module.LOCK).exists()
        publish(site("one"), tmp_path)
        assert not (tmp_path / module.LOCK).exists()

    def test_a_build_that_fails_leaves_no_folder(self, tmp_path: Path) -> None:
        with pytest.raises(RuntimeError), held(tmp_path / "new" / "site"):
            raise RuntimeError
        assert list(tmp_path.iterdir()) == []

    def test_a_refused_folder_is_left_untouched(self, tmp_path: Path) -> None:
        (tmp_path / "mine").mkdir()
        with pytest.raises(RefusedFolderError):
            refuse_foreign(tmp_path)
        with pytest.raises(RefusedFolderError), held(tmp_path):
            pass
        assert [p.name for p in tmp_path.iterdir()] == ["mine"]


class TestTrouble:
    @pytest.mark.parametrize(
        ("code", "remedy"),
        [
            (errno.ENOSPC, "Free some space"),
            (errno.EROFS, "right to write"),
            (errno.EIO, "See to that folder"),
        ],
    )
    def test_a_full_or_read_only_disk(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, code: int, remedy: str
    ) -> None:
        publish(site("one"), tmp_path)
        before = tree(tmp_path)

        def refuse(path: Path, content: bytes) -> None:
            if path.name == "signals.html":
                raise OSError(code, os.strerror(code), str(path))
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(content)

        monkeypatch.setattr(module, "_write", refuse)
        with pytest.raises(PublishError, match="still stands") as caught:
            publish(site("two"), tmp_path)
        assert remedy in caught.value.problems[0].remedy
        assert tree(tmp_path) == before
        assert not (tmp_path / module.STAGING).exists()

    def test_where_no_site_was_before_none_is_said_to_stand(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        def refuse(path: Path, content: bytes) -> None:  # noqa: ARG001
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC), str(path))

        monkeypatch.setattr(module, "_write", refuse)
        with pytest.raises(PublishError, match="could not be written") as caught:
            publish(site("one"), tmp_path / "new")
        assert "the one before" not in str(caught.value)

    def test_leftovers_of_an_interrupted_publication_go(self, tmp_path: Path) -> None:
        publish(site("one"), tmp_path)
        (tmp_path / module.STAGING / "assets").mkdir(parents=True)
        (tmp_path / module.STAGING / "assets/half.js").write_text("//")
        publish(site("one"), tmp_path)
        assert not (tmp_path / module.STAGING).exists()

    def test_a_link_in_place_of_staging_is_not_followed(self, tmp_path: Path) -> None:
        folder, outside = tmp_path / "site", tmp_path / "outside"
        outside.mkdir()
        (outside / "a").write_text("mine")
        publish(site("one"), folder)
        (folder / module.STAGING).symlink_to(outside)
        with pytest.raises(PublishError, match="in the way"):
            publish(site("two"), folder)
        assert (outside / "a").read_text() == "mine"

    def test_the_renames_that_fail_leave_pages_whole(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        real = os.replace
        publish(site("one"), tmp_path)

        def refuse(source: Path, target: Path) -> None:
            if Path(target).name == "signals.html":
                raise PermissionError(errno.EACCES, "in use", str(target))
            real(source, target)

        monkeypatch.setattr(os, "replace", refuse)
        with pytest.raises(PublishError):
            publish(site("two"), tmp_path)
        check_whole(tmp_path)
        monkeypatch.setattr(os, "replace", real)
        publish(site("two"), tmp_path)
        check_whole(tmp_path)


_KILLED = """
import json, os, sys
from pathlib import Path
from holdsteady.publish import publish
folder, step, site = Path(sys.argv[1]), int(sys.argv[2]), json.loads(sys.argv[3])
real, calls = os.replace, 0
def replace(source, target):
    global calls
    if calls == step:
        os._exit(9)
    calls += 1
    real(source, target)
os.replace = replace
publish({path: text.encode() for path, text in site.items()}, folder)
"""


def _env() -> dict[str, str]:
    return os.environ | {"PYTHONPATH": str(Path(module.__file__).parents[1])}


def _text(files: dict[str, bytes]) -> dict[str, str]:
    return {
        path: "{}" if path == "tables/build.json" else content.decode() for path, content in files.items()
    }


def _publish_and_die(folder: Path, step: int, files: dict[str, str]) -> int:
    command = [sys.executable, "-c", _KILLED, str(folder), str(step), json.dumps(files)]
    return subprocess.run(command, env=_env(), check=False, timeout=60).returncode


@pytest.mark.parametrize("first", [True, False], ids=["first publication", "next publication"])
def test_a_process_that_dies_at_any_rename_leaves_a_site_that_the_next_build_finishes(
    tmp_path: Path, *, first: bool
) -> None:
    new = site("two", pages=("bore", "new"))
    step = 0
    while True:
        folder = tmp_path / str(step)
        if not first:
            publish(site("one"), folder)
        code = _publish_and_die(folder, step, _text(new))
        if first:
            # Until the first index is there, nobody has a way in; afterwards all of it is there.
            assert not (folder / "index.html").exists() or set(visible(folder)) == set(new)
        else:
            check_whole(folder)
        if code == 0:
            break
        assert code == 9
        publish(site("three"), folder)
        check_whole(folder)
        assert site("three").keys() <= visible(folder).keys()
        assert not (folder / module.STAGING).exists()
        step += 1
    # The list beforehand, each file, and the list afterwards unless it stands already.
    assert step == len(new) + (1 if first else 2)
