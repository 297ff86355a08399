import threading
from pathlib import Path

import pytest

from modgen.outputs import pack
from modgen.outputs.pack import write_pack
from modgen.problems import InputError

FILES = {"design.json": b"{}\n", "bom.csv": b"a\r\n"}


def content(folder: Path) -> dict[str, bytes]:
    return {p.name: p.read_bytes() for p in sorted(folder.iterdir())}


def test_writes_all_files_and_nothing_else(job, tmp_path):
    target = write_pack(job, tmp_path, FILES)
    assert target == tmp_path / "two-lane-test-lag"
    assert content(target) == FILES
    assert [p.name for p in tmp_path.iterdir()] == [target.name]


def test_replaces_the_last_pack_whole(job, tmp_path):
    write_pack(job, tmp_path, {**FILES, "circuit.cir": b"old"})
    target = write_pack(job, tmp_path, {"design.json": b"new"})
    assert content(target) == {"design.json": b"new"}
    assert [p.name for p in tmp_path.iterdir()] == [target.name]


def test_makes_the_folder_for_packs_but_no_tree(job, tmp_path):
    assert write_pack(job, tmp_path / "output", FILES).is_dir()
    with pytest.raises(InputError) as caught:
        write_pack(job, tmp_path / "no" / "such", FILES)
    assert str(caught.value) == (
        f"{tmp_path}/no/such: error: '{tmp_path}/no/such' cannot be made: the folder above it is missing\n"
        f"    why: there is no folder '{tmp_path}/no'; a mistyped path is more likely than a new tree\n"
        "    fix: make that folder first, or correct the path"
    )
    assert not (tmp_path / "no").exists()


def test_a_file_in_the_way(job, tmp_path):
    (tmp_path / "two-lane-test-lag").write_text("mine")
    with pytest.raises(InputError, match="is a file\n    why: the pack is a folder of that name\n"):
        write_pack(job, tmp_path, FILES)
    (tmp_path / "out").write_text("mine")
    with pytest.raises(InputError, match="is not a folder\n"):
        write_pack(job, tmp_path / "out", FILES)
    assert (tmp_path / "two-lane-test-lag").read_text() == "mine"


def test_a_link_in_the_way(job, tmp_path):
    (tmp_path / "elsewhere").mkdir()
    (tmp_path / "two-lane-test-lag").symlink_to(tmp_path / "elsewhere")
    with pytest.raises(InputError, match="is a symbolic link\n"):
        write_pack(job, tmp_path, FILES)
    assert (tmp_path / "two-lane-test-lag").is_symlink()


def test_a_folder_that_is_no_pack(job, tmp_path):
    other = tmp_path / "two-lane-test-lag"
    other.mkdir()
    (other / "thesis.txt").write_text("mine")
    with pytest.raises(InputError, match=r"is a folder without design\.json, so modgen did not write it\n"):
        write_pack(job, tmp_path, FILES)
    assert content(other) == {"thesis.txt": b"mine"}


def test_somebodys_own_file_in_a_pack(job, tmp_path):
    target = write_pack(job, tmp_path, FILES)
    (target / "notes.txt").write_text("mine")
    (target / ".~lock.bom.csv#").write_text("open")
    with pytest.raises(InputError, match=r"holds what modgen did not write: notes\.txt\n"):
        write_pack(job, tmp_path, {"design.json": b"new"})
    (target / "notes.txt").unlink()
    assert content(write_pack(job, tmp_path, {"design.json": b"new"})) == {"design.json": b"new"}


def test_an_empty_folder_is_nobodys(job, tmp_path):
    (tmp_path / "two-lane-test-lag").mkdir()
    assert content(write_pack(job, tmp_path, FILES)) == FILES


@pytest.mark.parametrize("fails_at", ["write", "swap"])
def test_a_run_that_fails_leaves_the_last_good_pack(job, tmp_path, monkeypatch, fails_at):
    target = write_pack(job, tmp_path, FILES)

    def full(_):
        raise OSError(28, "No space left on device")

    rename = Path.rename

    def refuse(self, other):
        if ".new-" in self.name:
            raise PermissionError(13, "Permission denied")
        return rename(self, other)

    with monkeypatch.context() as patch:
        if fails_at == "write":
            patch.setattr(pack.os, "fsync", full)
        else:
            patch.setattr(Path, "rename", refuse)
        with pytest.raises(InputError) as caught:
            write_pack(job, tmp_path, {"design.json": b"new"})
    reason = "No space left on device" if fails_at == "write" else "Permission denied"
    assert str(caught.value) == (
        f"{target}: error: '{target}' cannot be written: {reason}\n"
        "    why: the last good pack, if there was one, is untouched\n"
        "    fix: make room and permission there, or choose another folder with --out"
    )
    assert content(target) == FILES
    assert [p.name for p in tmp_path.iterdir()] == [target.name]


def test_a_failed_first_run_leaves_nothing(job, tmp_path, monkeypatch):
    def full(_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(pack.os, "fsync", full)
    with pytest.raises(InputError):
        write_pack(job, tmp_path / "output", FILES)
    assert list(tmp_path.iterdir()) == []


def test_an_interrupted_run_cleans_up_too(job, tmp_path, monkeypatch):
    def stop(_):
        raise KeyboardInterrupt

    monkeypatch.setattr(pack.os, "fsync", stop)
    with pytest.raises(KeyboardInterrupt):
        write_pack(job, tmp_path, FILES)
    assert list(tmp_path.iterdir()) == []


def test_what_a_killed_run_left_is_put_right(job, tmp_path):
    pytest.importorskip("fcntl")
    target = write_pack(job, tmp_path, FILES)
    # killed between the two renames: the old pack stands aside, the new one waits
    target.rename(tmp_path / f".{target.name}.old-{'0' * 16}")
    (tmp_path / f".{target.name}.new-{'1' * 16}").mkdir()
    (tmp_path / ".two-lane-test-lag.old-mine").mkdir()  # not one of ours
    write_pack(job, tmp_path, {"design.json": b"new"})
    assert content(target) == {"design.json": b"new"}
    assert sorted(p.name for p in tmp_path.iterdir()) == [".two-lane-test-lag.old-mine", target.name]


def test_two_runs_at_once_never_mix(job, tmp_path):
    packs = [{name: str(n).encode() for name in ("design.json", "bom.csv", "circuit.cir")} for n in range(6)]
    failed: list[BaseException] = []

    def build(files):
        try:
            for _ in range(5):
                write_pack(job, tmp_path, files)
        except BaseException as problem:
            failed.append(problem)

    threads = [threading.Thread(target=build, args=(files,)) for files in packs]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failed == []
    assert content(tmp_path / "two-lane-test-lag") in packs
    assert [p.name for p in tmp_path.iterdir()] == ["two-lane-test-lag"]


@pytest.mark.parametrize("name", ["../evil", "", "a/b", ".."])
def test_a_name_that_leaves_the_folder_is_a_mistake_of_ours(job, tmp_path, name):
    with pytest.raises(ValueError, match="is not a file name"):
        write_pack(job, tmp_path, {name: b""})
