"""Results kept between runs: what answers, what must not, and how large the folder grows."""

from __future__ import annotations

import hashlib
import json
import os
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from datetime import date
from pathlib import Path

import pytest

from pairrules import pipeline
from pairrules.pipeline import check
from pairrules.result import Result
from pairrules.running.kept_check import kept_check
from pairrules.running.kept_results import KeptResults
from pairrules.running.plain_records import from_plain, to_plain
from tests.cli.boards import LIMITS, limits, put


def test_what_was_put_is_got_and_damage_is_not_believed(tmp_path: Path) -> None:
    kept = KeptResults(tmp_path / "kept")
    kept.put("a", {"x": [1, 2.5, None, "ä"]})
    assert kept.get("a") == {"x": [1, 2.5, None, "ä"]}
    assert kept.get("b") is None
    path = tmp_path / "kept" / "a.json"
    whole = path.read_bytes()
    for damaged in (b"", whole[:-1], whole.replace(b"2.5", b"2.6"), b"\xff" + whole, whole.split(b"\n")[1]):
        path.write_bytes(damaged)
        assert kept.get("a") is None
        assert not path.exists()
    text = b"[" * 100_000
    path.write_bytes(hashlib.sha256(text).hexdigest().encode() + b"\n" + text)
    assert kept.get("a") is None


def test_the_least_recently_used_go_first(tmp_path: Path) -> None:
    kept = KeptResults(tmp_path, most=10_000)
    for i, key in enumerate("abcd"):
        kept.put(key, "x" * 2000)
        os.utime(tmp_path / f"{key}.json", (1000 + i, 1000 + i))
    assert kept.get("a") is not None  # used just now
    kept.put("e", "x" * 2000)
    assert sorted(path.name[0] for path in tmp_path.iterdir()) == ["a", "c", "d", "e"]
    kept.put("large", "x" * 3000)
    assert kept.get("large") is None
    assert kept.clear().results == 4
    assert kept.extent().results == 0


def test_several_writers_leave_one_whole_entry(tmp_path: Path) -> None:
    kept = KeptResults(tmp_path)
    with ThreadPoolExecutor(8) as pool:
        list(pool.map(lambda i: kept.put("a", [i] * 1000), range(64)))
    (left,) = tmp_path.iterdir()
    found = kept.get("a")
    assert found == [found[0]] * 1000
    assert left.name == "a.json"


def test_a_folder_that_cannot_be_made_fails_nothing(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    kept = KeptResults(tmp_path / "file" / "kept")
    kept.put("a", 1)
    assert kept.get("a") is None
    assert kept.extent().results == 0


def test_a_result_goes_to_plain_and_back(tmp_path: Path) -> None:
    limits(tmp_path)
    result = check(put(tmp_path, bump=1.0))
    again = from_plain(Result, json.loads(json.dumps(to_plain(result))))
    assert again == result
    assert repr(again) == repr(result)


@pytest.mark.parametrize("wrong", [[], {}, None, [1] * 8, "x"])
def test_what_does_not_fit_is_refused(wrong: object) -> None:
    with pytest.raises(ValueError, match=r"fields|expected"):
        from_plain(Result, wrong)


class Counted:
    """How often a check was really done."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.times = 0
        really = pipeline.check

        def counting(*arguments: object, **options: object) -> Result:
            self.times += 1
            return really(*arguments, **options)  # type: ignore[arg-type]

        monkeypatch.setattr(pipeline, "check", counting)


def test_it_is_done_anew_when_anything_it_rests_on_changes(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    done, kept = Counted(monkeypatch), KeptResults(tmp_path / "kept")
    home = tmp_path / "project" / "boards"
    home.mkdir(parents=True)
    path, own = str(put(home, bump=1.0)), limits(home.parent)

    def times(today: date | None = None, pairs: str = "*") -> int:
        before = done.times
        result = kept_check(path, today=today, pairs=pairs, kept=kept)
        assert result == kept_check(path, today=today, pairs=pairs, kept=kept)
        return done.times - before

    assert times() == 1
    assert times() == 0
    assert times(date(2031, 1, 1)) == 0
    assert times(pairs="IN") == 1
    put(home, bump=1.1)
    assert times() == 1
    own.write_text(LIMITS.replace("0.5 mm", "0.6 mm"), encoding="utf-8")
    assert times() == 1
    # Settings nearer to the board than those that were found.
    (home / "pairrules.yaml").write_text("extends: [../more.yaml]\n", encoding="utf-8")
    (home.parent / "more.yaml").write_text(LIMITS, encoding="utf-8")
    assert times() == 1
    (home.parent / "more.yaml").write_text(LIMITS.replace("0.5 mm", "0.7 mm"), encoding="utf-8")
    assert times() == 1
    mark = next(f.fingerprint for pair in check(path).pairs for f in pair.findings)
    waiver = f"- {{rule: leg-length, pair: IN, reason: 'a test', until: 2031-05-17, fingerprint: '{mark}'}}\n"
    (home / "pairrules-waivers.yaml").write_text(waiver, encoding="utf-8")
    assert times(date(2031, 1, 1)) == 1
    assert times(date(2031, 1, 1)) == 0
    assert times(date(2032, 1, 1)) == 1


def test_another_version_of_the_tool_does_not_answer(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    done, kept = Counted(monkeypatch), KeptResults(tmp_path / "kept")
    path = str(put(tmp_path))
    kept_check(path, kept=kept)
    monkeypatch.setattr("pairrules.running.kept_check._tool", lambda: "other")
    kept_check(path, kept=kept)
    assert done.times == 2


def test_a_hostile_entry_is_not_believed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    done, kept = Counted(monkeypatch), KeptResults(tmp_path / "kept")
    path = str(put(tmp_path, bump=1.0))
    true = kept_check(path, kept=kept)
    (entry,) = (tmp_path / "kept").iterdir()
    for value in ([], {"rests_on": [], "day": "", "result": []}, {"rests_on": 3, "day": "", "result": to_plain(true)}):
        kept.put(entry.stem, value)
        assert kept_check(path, kept=kept) == true
    assert done.times == 4
    assert replace(true, version="x") != true
