"""Settings, draft and the folders they live in: what is good counts, a fault is one sentence."""

from __future__ import annotations

import errno
import json
import os
import stat
from dataclasses import asdict, replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given
from hypothesis import settings as hypothesis_settings
from hypothesis import strategies as st

from gaugeside import settings as module
from gaugeside.errors import Refusal
from gaugeside.settings import Settings, load_draft, load_settings, places, save_draft, save_settings
from gaugeside.text import plain_text
from unit.ordinary_user import as_ordinary_user, reachable

JSON_VALUES = st.recursive(
    st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=70),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=8,
)


def test_one_folder_for_all_when_named(tmp_path: Path) -> None:
    home = tmp_path / "plant pc"
    found = places({"GAUGESIDE_HOME": str(home)})
    assert found.settings_file == home / "settings.json"
    assert found.draft_file == home / "draft.json"
    assert found.logbook_file == home / "logbook.sqlite3"
    assert found.themes_folder == home / "themes"
    assert found.log_file == home / "helper.log"
    assert not home.exists(), "naming the places must create nothing"


def test_logbook_path_overrides_the_logbook_alone(tmp_path: Path) -> None:
    home = {"GAUGESIDE_HOME": str(tmp_path)}
    named = places(home, logbook=tmp_path / "elsewhere" / "rack2.sqlite3")
    assert named.logbook_file == tmp_path / "elsewhere" / "rack2.sqlite3"
    assert named.draft_file == places(home).draft_file


def test_platform_folders_without_the_override(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("GAUGESIDE_HOME", raising=False)
    monkeypatch.setattr(module.platformdirs, "user_config_path", lambda name, appauthor: tmp_path / "c" / name)
    monkeypatch.setattr(module.platformdirs, "user_data_path", lambda name, appauthor: tmp_path / "d" / name)
    monkeypatch.setattr(module.platformdirs, "user_state_path", lambda name, appauthor: tmp_path / "s" / name)
    found = places()
    assert found.settings_file == tmp_path / "c" / "gaugeside" / "settings.json"
    assert found.logbook_file == tmp_path / "d" / "gaugeside" / "logbook.sqlite3"
    assert found.log_file == tmp_path / "s" / "gaugeside" / "helper.log"


def test_no_home_folder_known_is_refused_not_created(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    with pytest.raises(Refusal, match="No home folder is known"):
        save_settings(Path("~/.config/gaugeside/settings.json"), Settings())
    assert list(tmp_path.iterdir()) == []


def test_settings_come_back_as_saved(tmp_path: Path) -> None:
    path = tmp_path / "new" / "settings.json"
    mine = Settings(
        site_pressure_text="1600 m",
        site_pressure_from="altitude",
        dress="ip",
        units={"pressure": "psi"},
        bare_pressure="absolute",
        datum="ashrae",
        theme="high contrast",
        refrigerant="R-454C",
        tag="rack 2, harbour store, north side °",
    )
    save_settings(path, mine)
    assert load_settings(path) == (mine, [])
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert stat.S_IMODE(path.parent.stat().st_mode) == 0o700
    assert [entry.name for entry in path.parent.iterdir()] == ["settings.json"]


def test_an_existing_folder_keeps_its_permissions(tmp_path: Path) -> None:
    folder = tmp_path / "shared"
    folder.mkdir()
    folder.chmod(0o775)
    save_settings(folder / "settings.json", Settings())
    assert stat.S_IMODE(folder.stat().st_mode) == 0o775


def test_absent_file_is_the_defaults(tmp_path: Path) -> None:
    assert load_settings(tmp_path / "none" / "settings.json") == (Settings(), [])
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("name", "value", "words"),
    [
        ("dress", "metric", "not one of si, ip"),
        ("dress", 3, "not a text"),
        ("dress", ["si"], "not a text"),
        ("units", "bar", "not a list of units"),
        ("units", {"pressure": 1}, "not a text"),
        ("theme", "x" * 61, "longer than 60"),
        ("tag", None, "not a text"),
        ("window", "big", "not a setting of this version"),
    ],
)
def test_one_bad_field_is_named_and_the_good_ones_count(tmp_path: Path, name: str, value: object, words: str) -> None:
    path = tmp_path / "settings.json"
    path.write_text(json.dumps({"datum": "nbp", name: value}))
    found, faults = load_settings(path)
    assert found == Settings(datum="nbp")
    assert len(faults) == 1
    assert words in faults[0]
    assert name in faults[0]


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"{",
        b'{"dress": "ip"',
        b"[1, 2]",
        b"null",
        b"\xff\xfe\x00",
        b'{"tag": NaN}',
        b"[" * 100_000,
        b'{"a": ' * 30 + b"1" + b"}" * 30,
        b'{"n": ' + b"9" * 10_000 + b"}",
        b'{"tag": "' + b"x" * 1_100_000 + b'"}',
    ],
    ids=lambda content: repr(content[:12]),
)
def test_damaged_file_is_reported_untouched_and_kept_aside_on_the_next_save(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "settings.json"
    path.write_bytes(content)
    found, faults = load_settings(path)
    assert found == Settings()
    assert len(faults) == 1
    assert faults[0].endswith(".")
    assert path.read_bytes() == content
    save_settings(path, Settings(dress="ip"))
    assert load_settings(path) == (Settings(dress="ip"), [])
    assert (tmp_path / "settings.json.unreadable").read_bytes() == content


def test_a_second_damaged_file_does_not_replace_the_first_kept_aside(tmp_path: Path) -> None:
    path = tmp_path / "draft.json"
    for content in ("first", "second"):
        path.write_text(content)
        save_draft(path, {})
    assert (tmp_path / "draft.json.unreadable").read_text() == "first"
    assert (tmp_path / "draft.json.unreadable-2").read_text() == "second"


def test_a_healthy_file_is_not_kept_aside(tmp_path: Path) -> None:
    path = tmp_path / "settings.json"
    save_settings(path, Settings())
    save_settings(path, Settings(dress="ip"))
    assert [entry.name for entry in tmp_path.iterdir()] == ["settings.json"]


def test_a_newer_version_s_settings_stay_and_are_not_kept_aside(tmp_path: Path) -> None:
    path = tmp_path / "settings.json"
    path.write_text('{"dress": "ip", "gauges": {"blue": ["suction", 1]}}')
    found, faults = load_settings(path)
    assert faults == ['settings.json: "gauges" is not a setting of this version and is not used.']
    save_settings(path, replace(found, tag="rack 2"))
    mine = asdict(Settings(dress="ip", tag="rack 2"))
    assert json.loads(path.read_text()) == {**mine, "gauges": {"blue": ["suction", 1]}}
    assert [entry.name for entry in tmp_path.iterdir()] == ["settings.json"]


def test_a_file_that_cannot_be_read_is_neither_replaced_nor_renamed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name, save in (("settings.json", lambda path: save_settings(path, Settings())), ("draft.json", save_empty)):
        path = tmp_path / name
        path.write_text('{"dress": "ip"}')
        with monkeypatch.context() as patch:
            patch.setattr(Path, "open", stale)
            with pytest.raises(Refusal, match=r"cannot be written \(stale file handle\)"):
                save(path)
        assert path.read_text() == '{"dress": "ip"}'
    assert sorted(entry.name for entry in tmp_path.iterdir()) == ["draft.json", "settings.json"]


def save_empty(path: Path) -> None:
    save_draft(path, {})


def stale(*_: object) -> None:
    raise OSError(errno.ESTALE, "Stale file handle")


@pytest.mark.parametrize(
    "content", [{"forms": []}, {"forms": {"machine": 3}}, {"forms": {"machine": {"texts": ["2 bar"]}}}, {"note": 4}]
)
def test_a_draft_of_other_things_is_told_and_kept_aside(tmp_path: Path, content: object) -> None:
    path = tmp_path / "draft.json"
    path.write_text(json.dumps(content))
    assert ["something else than forms" in fault for fault in load_draft(path)[1]] == [True]
    save_draft(path, {"pane": "machine"})
    assert load_draft(path) == ({"pane": "machine"}, [])
    assert json.loads((tmp_path / "draft.json.unreadable").read_text()) == content


def test_every_missing_folder_is_made_for_its_owner_alone_and_its_name_is_synced(
    tmp_path: Path, synced: list[Path]
) -> None:
    before = os.umask(0)
    try:
        save_settings(tmp_path / "a" / "b" / "settings.json", Settings())
    finally:
        os.umask(before)
    assert [stat.S_IMODE((tmp_path / name).stat().st_mode) for name in ("a", "a/b")] == [0o700, 0o700]
    # Each folder's name in the one above it, then the file's content before it gets its name, then that name.
    content = next(path for path in synced if path.name.startswith(".settings.json."))
    assert synced == [tmp_path, tmp_path / "a", content, tmp_path / "a" / "b"]


def test_the_draft_s_content_is_synced_before_its_name(tmp_path: Path, synced: list[Path]) -> None:
    save_draft(tmp_path / "draft.json", {})
    content, folder = synced
    assert content.name.startswith(".draft.json.")
    assert folder == tmp_path


@pytest.fixture
def synced(monkeypatch: pytest.MonkeyPatch) -> list[Path]:
    """The path of everything that the disk was asked to keep, in this order."""
    asked: list[Path] = []
    sync = os.fsync

    def watched(handle: int) -> None:
        asked.append(Path(os.readlink(f"/proc/self/fd/{handle}")))
        sync(handle)

    monkeypatch.setattr(module.os, "fsync", watched)
    return asked


def test_folder_and_pipe_in_the_file_s_place(tmp_path: Path) -> None:
    folder = tmp_path / "settings.json"
    folder.mkdir()
    assert load_settings(folder)[1] == ["settings.json cannot be read (not a file); it is not used and left as it is."]
    with pytest.raises(Refusal, match="cannot be written"):
        save_settings(folder, Settings())
    assert [entry.name for entry in tmp_path.iterdir()] == ["settings.json"], "no temporary file stays"
    pipe = tmp_path / "pipe.json"
    os.mkfifo(pipe)
    assert load_settings(pipe)[1] == ["pipe.json cannot be read (not a file); it is not used and left as it is."]
    with pytest.raises(Refusal, match="cannot be written"):
        save_settings(pipe, Settings())
    assert stat.S_ISFIFO(pipe.stat().st_mode)


def test_parent_is_a_file(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("x")
    path = tmp_path / "file" / "settings.json"
    assert "cannot be read" in load_settings(path)[1][0]
    with pytest.raises(Refusal, match="not a directory"):
        save_settings(path, Settings())


def test_no_permission(tmp_path: Path) -> None:
    with reachable(tmp_path) as home:
        path = home / "settings.json"
        save_settings(path, Settings(dress="ip"))
        path.chmod(0)
        with as_ordinary_user(home):
            assert "permission denied" in load_settings(path)[1][0]
            home.chmod(0o555)
            with pytest.raises(Refusal, match="permission denied"):
                save_settings(path, Settings())
        path.chmod(0o600)
        assert load_settings(path) == (Settings(dress="ip"), [])


def test_full_disk_leaves_the_old_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "draft.json"
    save_draft(path, {"superheat": {"suction_pressure": "38 psig"}})

    def full(handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(module.os, "fsync", full)
    with pytest.raises(Refusal, match="no space left on device"):
        save_draft(path, {"superheat": {}})
    assert load_draft(path) == ({"superheat": {"suction_pressure": "38 psig"}}, [])
    assert [entry.name for entry in tmp_path.iterdir()] == ["draft.json"]


def test_saving_replaces_a_link_and_not_what_it_points_to(tmp_path: Path) -> None:
    outside = tmp_path / "outside.json"
    outside.write_text('{"dress": "ip"}')
    home = tmp_path / "home"
    home.mkdir()
    (home / "settings.json").symlink_to(outside)
    save_settings(home / "settings.json", Settings(datum="nbp"))
    assert outside.read_text() == '{"dress": "ip"}'
    assert load_settings(home / "settings.json")[0] == Settings(datum="nbp")


def test_draft_comes_back_with_every_text_as_typed(tmp_path: Path) -> None:
    draft = {"pane": "superheat", "forms": {"superheat": {"suction pressure": "12,4 bar g", "t": "−5 °C"}}}
    save_draft(tmp_path / "draft.json", draft)
    assert load_draft(tmp_path / "draft.json") == (draft, [])


def test_a_draft_that_is_not_a_number_is_refused(tmp_path: Path) -> None:
    with pytest.raises(Refusal, match=r"draft\.json cannot hold"):
        save_draft(tmp_path / "draft.json", {"x": float("nan")})
    assert list(tmp_path.iterdir()) == []


def test_control_and_direction_characters_do_not_come_in(tmp_path: Path) -> None:
    path = tmp_path / "settings.json"
    path.write_text(json.dumps({"tag": "rack\x1b[31m 2\u202e\ud800\x9b\nnorth", "theme": "a\x00b"}))
    found, faults = load_settings(path)
    assert found.tag == "rack[31m 2 north"
    assert found.theme == "ab"
    assert faults == []


def test_plain_text_keeps_markup_and_letters_of_every_script() -> None:
    assert plain_text("[b]Kühlraum 2 שלום 冷庫 °[/b]") == "[b]Kühlraum 2 שלום 冷庫 °[/b]"
    assert plain_text("abcdef", longest=3) == "abc"
    assert plain_text("\x00\x07abc", longest=2) == "ab"


# The first drawn text builds the table of all characters, which alone takes a second.
@hypothesis_settings(max_examples=80, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.dictionaries(st.sampled_from([*Settings.__dataclass_fields__, "other"]), JSON_VALUES))
def test_any_content_gives_valid_settings(tmp_path_factory: pytest.TempPathFactory, content: object) -> None:
    path = tmp_path_factory.mktemp("settings") / "settings.json"
    path.write_text(json.dumps(content))
    found, before = load_settings(path)
    save_settings(path, found)
    # What this version does not know may be a newer one's: it stays, and is told.
    assert load_settings(path) == (found, [fault for fault in before if "not a setting of this version" in fault])
