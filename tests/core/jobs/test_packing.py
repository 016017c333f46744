"""A session and its data in one zip file; read with the standard library's zipfile."""

import hashlib
import json
import os
import zipfile
from dataclasses import replace
from pathlib import Path

import pytest

from made_up import made_up_session
from shadowscale.errors import SessionError, UsageError
from shadowscale.jobs.packing import is_packed, pack_session, unpack_session
from shadowscale.session import Exclusion, Session, Source, open_session, save_session

NIGHTS = "BJD_TDB,mag,mag_err\n" + "\n".join(
    f"{2459000 + number / 10:.2f},{12 + number / 1000:.3f},0.005" for number in range(30)
)


@pytest.fixture
def folder(tmp_path):
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "nights.csv").write_text(NIGHTS.replace("0.005", f"0.00{len(name)}"))
    (tmp_path / "two" / "nights.csv").write_text(NIGHTS + "\n2459100.5,12.1,0.004\n")
    return tmp_path


@pytest.fixture
def session(folder):
    sources = tuple(Source(str(folder / name / "nights.csv"), band="V") for name in ("one", "two"))
    exclusion = Exclusion("light", str(folder / "two" / "nights.csv"), (3, 4), "clouds")
    save_session(
        Session(photometry_sources=sources, exclusions=(exclusion,)), folder / "session.json"
    )
    return open_session(folder / "session.json")


def test_what_was_packed_opens_elsewhere_with_the_same_rows(session, folder):
    packed = pack_session(session, folder / "away" / "nights.zip")
    assert is_packed(packed)
    for name in ("one", "two"):
        (folder / name / "nights.csv").unlink()
    path = unpack_session(packed)
    assert path == folder / "away" / "nights" / "session.json"
    opened = open_session(path, same_files=True)
    assert opened.photometry.time.tolist() == session.photometry.time.tolist()
    assert opened.photometry.used.tolist() == session.photometry.used.tolist()
    assert (~opened.photometry.used).sum() == 2
    names = [Path(source.path).relative_to(path.parent) for source in opened.photometry_sources]
    assert names == [Path("data/nights.csv"), Path("data/2_nights.csv")]


def test_an_outside_reader_finds_every_file_with_its_checksum(session, folder):
    """The list has the form of coreutils' sha256sum: digest, two blanks, name."""
    packed = pack_session(session, folder / "nights.zip")
    with zipfile.ZipFile(packed) as archive:
        assert archive.testzip() is None
        names = set(archive.namelist())
        for line in archive.read("checksums.sha256").decode().splitlines():
            digest, name = line.split("  ")
            assert hashlib.sha256(archive.read(name)).hexdigest() == digest
            names.remove(name)
        document = json.loads(archive.read("session.json"))
    assert names == {"README.txt", "checksums.sha256"}
    assert [source["path"] for source in document["photometry_sources"]] == [
        "data/nights.csv",
        "data/2_nights.csv",
    ]
    assert str(folder) not in json.dumps(document)


def test_names_that_other_systems_refuse_are_made_plain(folder):
    """Windows forbids these characters in names (Microsoft, Naming Files, Paths, and Namespaces)."""
    odd = os.fsdecode(b"night: V?\xe9.csv")
    (folder / odd).write_text(NIGHTS)
    exclusion = Exclusion("light", str(folder / odd), (5,), "clouds")
    session = Session(photometry_sources=(Source(str(folder / odd)),), exclusions=(exclusion,))
    opened = open_session(unpack_session(pack_session(session, folder / "a.zip")))
    assert Path(opened.photometry_sources[0].path).name == "night_ V__.csv"
    assert opened.photometry.line[~opened.photometry.used].tolist() == [5]


def test_a_table_of_limb_darkening_goes_with_the_session(folder):
    table = folder / "table.txt"
    table.write_text("5000 4.5 0.0 V 0.6 0.2\n")
    sources = (Source(str(folder / "one" / "nights.csv")),)
    plan = replace(made_up_session().plan, limb_table=str(table))
    packed = pack_session(Session(photometry_sources=sources, plan=plan), folder / "x.zip")
    opened = open_session(unpack_session(packed, folder / "there"))
    assert Path(opened.plan.limb_table).read_text() == table.read_text()


def test_the_same_session_gives_the_same_bytes(session, folder):
    first = pack_session(session, folder / "a.zip").read_bytes()
    assert pack_session(session, folder / "b.zip").read_bytes() == first


def test_nothing_is_replaced_unasked_and_an_input_never(session, folder):
    packed = pack_session(session, folder / "nights.zip")
    before = packed.read_bytes()
    with pytest.raises(UsageError, match="a free place, or --overwrite"):
        pack_session(session, packed)
    assert packed.read_bytes() == before
    source = replace(session.photometry_sources[0], path=str(packed), sha256="")
    with pytest.raises(UsageError, match="a folder without the input files"):
        pack_session(replace(session, photometry_sources=(source,)), packed, overwrite=True)


def test_a_full_disk_leaves_no_half_pack(session, folder, monkeypatch):
    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("shadowscale.session.atomic.os.fsync", full)
    with pytest.raises(UsageError, match="No space left on device"):
        pack_session(session, folder / "out" / "nights.zip")
    assert list((folder / "out").iterdir()) == []


def test_data_that_changed_since_are_not_packed(session, folder):
    (folder / "one" / "nights.csv").write_text(NIGHTS + "\n2459200.5,12.0,0.004\n")
    (folder / "two" / "nights.csv").unlink()
    with pytest.raises(SessionError, match=r"solve it again[\s\S]*No such file"):
        pack_session(session, folder / "nights.zip")
    assert not (folder / "nights.zip").exists()


def test_work_done_in_an_unpacked_folder_is_not_lost(session, folder):
    packed = pack_session(session, folder / "nights.zip")
    path = unpack_session(packed)
    assert unpack_session(packed) == path  # nothing differs: nothing is asked
    path.write_text(path.read_text().replace("clouds", "dust"))
    with pytest.raises(UsageError, match=r"session\.json, which exists"):
        unpack_session(packed)
    assert "dust" in path.read_text()
    unpack_session(packed, overwrite=True)
    assert "clouds" in path.read_text()


# Files that somebody else made


def repacked(packed, target, changes):
    """The same zip with other content of some names; None leaves one out."""
    with zipfile.ZipFile(packed) as archive:
        contents = {name: archive.read(name) for name in archive.namelist()}
    contents |= changes
    with zipfile.ZipFile(target, "w") as archive:
        for name, content in contents.items():
            if content is not None:
                archive.writestr(name, content)
    return target


@pytest.mark.parametrize(
    "name",
    [
        "../evil.txt",
        "data/../../evil.txt",
        "/nowhere/evil.txt",
        "data\\..\\evil",
        "C:evil",
        "a/b",
        "data/",
    ],
)
def test_no_path_leads_out_of_the_folder(session, folder, name):
    packed = repacked(pack_session(session, folder / "a.zip"), folder / "b.zip", {name: b"evil"})
    with pytest.raises(SessionError, match="expected files in data/"):
        unpack_session(packed, folder / "deep" / "there")
    assert not (folder / "deep").exists()
    assert not list(folder.rglob("evil*"))


def test_a_link_is_refused(session, folder):
    packed = pack_session(session, folder / "a.zip")
    with zipfile.ZipFile(packed, "a") as archive:
        link = zipfile.ZipInfo("data/link")
        link.external_attr = 0o120777 << 16  # a symbolic link, as Info-ZIP stores it
        archive.writestr(link, "/etc/passwd")
    with pytest.raises(SessionError, match="data/link"):
        unpack_session(packed)


def test_a_session_that_asks_for_files_outside_is_refused(session, folder):
    packed = pack_session(session, folder / "a.zip")
    with zipfile.ZipFile(packed) as archive:
        text = archive.read("session.json").decode().replace("data/2_", "../two/")
        sums = archive.read("checksums.sha256").decode()
        old = hashlib.sha256(archive.read("session.json")).hexdigest()
    sums = sums.replace(old, hashlib.sha256(text.encode()).hexdigest())
    evil = repacked(packed, folder / "b.zip", {"session.json": text, "checksums.sha256": sums})
    with pytest.raises(SessionError, match=r"\.\./two/nights\.csv"):
        unpack_session(evil)


def test_damage_is_told(session, folder):
    packed = pack_session(session, folder / "a.zip")
    other = repacked(packed, folder / "b.zip", {"data/nights.csv": b"BJD,mag\n1,2\n"})
    with pytest.raises(SessionError, match=r"data/nights\.csv as it was packed"):
        unpack_session(other)
    assert not list((folder / "b").rglob("nights.csv"))
    content = bytearray(packed.read_bytes())
    with zipfile.ZipFile(packed) as archive:
        content[archive.getinfo("data/nights.csv").header_offset + 90] ^= 0xFF
    (folder / "c.zip").write_bytes(content)
    with pytest.raises(SessionError, match=r"a damaged one|as it was packed"):
        unpack_session(folder / "c.zip")


@pytest.mark.parametrize("name", ["session.json", "checksums.sha256", "data/nights.csv"])
def test_a_pack_that_is_not_whole_is_refused(session, folder, name):
    packed = repacked(pack_session(session, folder / "a.zip"), folder / "b.zip", {name: None})
    with pytest.raises(SessionError, match=r"another zip file|other names"):
        unpack_session(packed)


def test_other_files_are_no_packs(folder):
    with pytest.raises(SessionError, match="found another file"):
        unpack_session(folder / "one" / "nights.csv")
    with pytest.raises(SessionError, match="no such file"):
        unpack_session(folder / "none.zip")
