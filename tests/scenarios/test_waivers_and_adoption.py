"""Permissions to merge through the real command, and stale results, on real repositories."""

from __future__ import annotations

import hashlib
import json
import os
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest
from support import GIT_ENVIRONMENT, POLICY, Document, changed, commit_all, drainage, git, weigh, write_tree

from gatecheck import gate
from gatecheck.cli import main
from gatecheck.permissions.accepted import ACCEPTED_FILE
from gatecheck.permissions.waivers import WAIVERS_FILE

RULE = "false-positive-risk"
YIELD = drainage(id="yield_2030", claim="Lime raises yield.")
STRONG: Document = {"value": 9.0, "statistic": "t", "df": 34, "name": "two-sample t", "p": "<0.001"}
WHAT = f"The waiver of {RULE} on yield_2030"


def strong(name: str, **changes: Any) -> Document:
    """A record that stands."""
    return drainage(id=name, test=STRONG, estimate=..., **changes)


def commit(folder: Path, day: str, author: str = "Ada Example <ada@example.org>") -> str:
    """Commit everything in the folder on that day, at noon, and return the commit."""
    if not (folder / ".git").exists():
        git(folder, "init", "-q")
    git(folder, "add", "-A")
    environment = {**os.environ, **GIT_ENVIRONMENT, "GIT_COMMITTER_DATE": f"{day}T12:00:00Z"}
    command = ["git", "commit", "-q", "--allow-empty", "-m", "x", f"--author={author}"]
    subprocess.run(command, cwd=folder, env=environment, check=True)
    return git(folder, "rev-parse", "HEAD")


def said(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str]:
    """The status of a command and what it tells, on one line."""
    status = main(arguments)
    return status, " ".join(capsys.readouterr().out.split())


@pytest.fixture
def station(tmp_path: Path) -> Path:
    """A repository with a claim that falls short, committed by Ada Example in May 2021."""
    folder = tmp_path / "station"
    folder.mkdir()
    write_tree(folder, YIELD)
    commit(folder, "2021-05-01")
    return folder


def digest_told(
    capsys: pytest.CaptureFixture[str], folder: Path, name: str = "yield_2030", rule: str = RULE
) -> str:
    """The digest that `explain` prints for whoever writes a waiver."""
    status, told = said(capsys, "explain", name, str(folder))
    assert status == 0
    _, found, digest = told.partition(f"Digests, for a waiver {rule}: ")
    assert found
    return digest.split()[0]


def grant(folder: Path, digest: str, granted_by: str = "Bo Sample <bo@example.org>", **changes: str) -> None:
    """Write a waiver of sixty days from the second of May on."""
    waiver = {
        "record": "yield_2030",
        "rule": RULE,
        "reason": "A second season is under way.",
        "granted_by": granted_by,
        "granted_on": "2021-05-02",
        "until": "2021-07-01",
        "digest": digest,
    } | changes
    lines = [f"{'- ' if key == 'record' else '  '}{key}: {value}\n" for key, value in waiver.items()]
    (folder / WAIVERS_FILE).write_text(f"gatecheck: waivers/1\nwaivers:\n{''.join(lines)}", encoding="utf-8")


def test_a_waiver_lives_and_ends(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Granted by the author: nothing; by another: waived and listed; later, or with other numbers: ended."""
    before = weigh(station).rule(RULE, "yield_2030")
    digest = digest_told(capsys, station)

    grant(station, digest, "ada example")
    commit(station, "2021-05-03")
    by_author = weigh(station)
    grant(station, digest)
    commit(station, "2021-05-04")
    granted, (status, account) = weigh(station), said(capsys, "weigh", str(station))
    commit(station, "2021-07-01")
    last_day = weigh(station)
    commit(station, "2021-07-02")
    expired = weigh(station)
    git(station, "reset", "-q", "--hard", "HEAD~2")
    (station / "r000.json").write_text(json.dumps(changed(YIELD, test__value=2.22)), encoding="utf-8")
    commit(station, "2021-05-05")
    other_numbers = weigh(station)

    assert (by_author.status, by_author.verdict["notes"]) == (
        1,
        [f"{WHAT} does not apply: it was granted by the author of the record's change."],
    )
    waived = granted.rule(RULE, "yield_2030")
    assert (granted.status, granted.claim("yield_2030")["verdict"], waived["outcome"]) == (0, "waived", "waived")
    assert (waived["observed"], waived["limit"]) == (before["observed"], before["limit"])
    assert waived["message"] == (
        f"{before['message']} Waived until 2021-07-01 by Bo Sample <bo@example.org>: A second season is under way."
    )
    assert granted.verdict["notes"] == []
    assert status == 0
    assert "Waived yield_2030 False positive risk:" in account
    assert "Waived until 2021-07-01 by Bo Sample <bo@example.org>: A second season is under way." in account
    assert last_day.status == 0
    assert (expired.status, expired.verdict["notes"]) == (1, [f"{WHAT} does not apply: it expired on 2021-07-01."])
    assert (other_numbers.status, other_numbers.verdict["notes"]) == (
        1,
        [f"{WHAT} does not apply: the record has changed since in what the rule reads."],
    )


def test_another_layout_of_the_file_does_not_change_who_may_grant(
    station: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The numbers are Ada's, whoever sets them out otherwise: she grants herself nothing, and Cleo may grant."""
    (station / "r000.json").write_text(json.dumps(YIELD, indent=4), encoding="utf-8")
    commit(station, "2021-05-02", "Cleo Test <cleo@example.org>")
    digest = digest_told(capsys, station)

    grant(station, digest, "Ada Example")
    commit(station, "2021-05-03", "Bo Sample <bo@example.org>")
    by_ada = weigh(station)
    grant(station, digest, "Cleo Test")
    commit(station, "2021-05-04", "Bo Sample <bo@example.org>")
    by_cleo = weigh(station)

    assert (by_ada.status, by_ada.verdict["notes"]) == (
        1,
        [f"{WHAT} does not apply: it was granted by the author of the record's change."],
    )
    assert (by_cleo.status, by_cleo.verdict["notes"]) == (0, [])


def test_in_a_shallow_clone_a_waiver_needs_the_history(
    station: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    grant(station, digest_told(capsys, station))
    commit(station, "2021-05-03")
    clone = tmp_path / "clone"
    git(tmp_path, "clone", "-q", "--depth=1", "-o", "field", station.as_uri(), str(clone))

    cut = weigh(clone)
    (note,) = cut.verdict["notes"]
    subprocess.run(["bash", "-c", note.split("`")[1]], cwd=clone, check=True, capture_output=True)

    assert cut.status == 1
    assert note == (
        f"{WHAT} does not apply: who changed the record is not known here: the history of this clone is cut; run "
        "`git fetch --unshallow field`."
    )
    assert (weigh(clone).status, weigh(clone).verdict["notes"]) == (0, [])


def test_another_wording_keeps_a_waiver(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grant(station, digest_told(capsys, station))
    (station / "r000.json").write_text(json.dumps(changed(YIELD, claim="Liming helps.")), encoding="utf-8")
    commit(station, "2021-05-04")

    assert weigh(station).status == 0


def test_another_wording_ends_a_waiver_of_what_is_said(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Its numbers stay as they are: what the waiver was granted for was the sentence."""
    policy = "gatecheck: policy/1\nrules: {wording: {}}\n"
    (station / "gatecheck.yaml").write_text(policy, encoding="utf-8")
    said_of_it = changed(YIELD, claim="Lime has no effect on yield.")
    (station / "r000.json").write_text(json.dumps(said_of_it), encoding="utf-8")
    commit(station, "2021-05-02")
    grant(station, digest_told(capsys, station, rule="wording"), rule="wording")
    commit(station, "2021-05-03")
    granted = weigh(station)
    said_of_it = changed(YIELD, claim="Lime makes no difference to yield.")
    (station / "r000.json").write_text(json.dumps(said_of_it), encoding="utf-8")
    commit(station, "2021-05-04")
    reworded = weigh(station)

    assert (granted.status, granted.rule("wording", "yield_2030")["outcome"]) == (0, "waived")
    assert (reworded.status, reworded.verdict["notes"]) == (
        1,
        [
            "The waiver of wording on yield_2030 does not apply: the record has changed since in what the rule "
            "reads."
        ],
    )


def test_a_request_grants_itself_nothing(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """On a pull request the waivers of the base count; one that is new there is told."""
    base = commit(station, "2021-05-02")
    grant(station, digest_told(capsys, station))
    commit(station, "2021-05-03", "Bo Sample <bo@example.org>")

    request, merged = weigh(station, "--base", base), weigh(station, "--base", "HEAD")

    assert request.status == 1
    assert f"{WAIVERS_FILE} is new here; what counts is the base, {base[:12]}." in request.verdict["notes"]
    assert (merged.status, merged.verdict["notes"]) == (0, [])


def test_what_is_not_committed_has_no_author(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grant(station, digest_told(capsys, station), until="9999-12-31")
    commit(station, "2021-05-03")
    (station / "r000.json").write_text(json.dumps(changed(YIELD, tags=["lime"])), encoding="utf-8")

    answer = weigh(station)

    assert answer.status == 1
    assert answer.verdict["notes"] == [
        f"{WHAT} does not apply: who changed the record is not known here: commit it."
    ]


def test_what_is_undecided_is_not_waived(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = write_tree(tmp_path, changed(YIELD, test=..., estimate=...))
    commit(folder, "2021-05-01")
    grant(folder, digest_told(capsys, folder))
    commit(folder, "2021-05-02")

    answer = weigh(folder)

    assert answer.status == 3
    assert answer.verdict["notes"] == [
        f"{WHAT} does not apply: the rule cannot be decided there, and only what was judged can be waived."
    ]


def test_a_broken_waiver_stops_the_gate(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grant(station, digest_told(capsys, station), until="2021-04-31")

    answer = weigh(station)

    assert answer.status == 3
    assert answer.verdict["problems"] == [
        {
            "at": {"path": WAIVERS_FILE, "line": 8},
            "message": "waivers[0].until is 2021-04-31, a day that no calendar has",
            "advice": "give a real day",
        }
    ]


@pytest.fixture
def legacy(tmp_path: Path) -> Path:
    """A repository of 214 records of which 61 fall short, committed."""
    folder = tmp_path / "legacy"
    folder.mkdir()
    weak = [drainage(id=f"weak/{number:02}", estimate=...) for number in range(61)]
    write_tree(folder, *weak, *(strong(f"strong/{number:03}") for number in range(153)))
    commit_all(folder, "base")
    return folder


def test_a_legacy_repository_is_adopted(legacy: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """After that only what is new falls short, and what changes loses its acceptance."""
    before = weigh(legacy)
    status, told = said(capsys, "adopt", str(legacy))
    adopted = weigh(legacy)
    base = commit_all(legacy, "adopt")

    (legacy / "r000.json").write_text(json.dumps(drainage(id="weak/00", test__value=2.2, estimate=...)), "utf-8")
    (legacy / "r100.json").write_text(json.dumps(drainage(id="strong/039", estimate=...)), "utf-8")
    commit_all(legacy, "request")
    request = weigh(legacy, "--base", base)

    assert (before.status, before.verdict["counts"]["falls-short"]) == (1, 61)
    assert status == 0
    assert told == (
        "Accepted 61 shortfalls of 61 records in gatecheck.accepted.yaml: each holds until its record changes in "
        "what the rule reads. Commit this file; on a pull request the one that counts is that of the base."
    )
    assert (adopted.status, adopted.verdict["counts"]["waived"], adopted.verdict["notes"]) == (0, 61, [])
    assert adopted.rule(RULE, "weak/07")["message"].endswith(
        "Accepted on adoption, until the record changes in what the rule reads."
    )
    short = [one["id"] for one in request.verdict["claims"] if one["verdict"] == "falls-short"]
    assert (request.status, short) == (1, ["weak/00", "strong/039"])
    assert (
        f"Accepted on adoption and no longer, as the record changed: weak/00 ({RULE})." in request.verdict["notes"]
    )


def test_a_request_does_not_accept_its_own_shortfalls(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    base = git(station, "rev-parse", "HEAD")
    said(capsys, "adopt", str(station))
    commit(station, "2021-05-02")

    answer = weigh(station, "--base", base)

    assert answer.status == 1
    assert f"{ACCEPTED_FILE} is new here; what counts is the base, {base[:12]}." in answer.verdict["notes"]


def test_adopting_again_only_shortens_the_list(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (station / "r001.json").write_text(json.dumps(drainage(id="second", estimate=...)), encoding="utf-8")
    said(capsys, "adopt", str(station))
    (station / "r001.json").write_text(json.dumps(strong("second")), encoding="utf-8")
    (station / "r002.json").write_text(json.dumps(drainage(id="new", estimate=...)), encoding="utf-8")
    notes = weigh(station).verdict["notes"]

    status, told = said(capsys, "adopt", str(station))
    entries = (station / ACCEPTED_FILE).read_text(encoding="utf-8").count("record:")
    again = said(capsys, "adopt", str(station))

    assert notes == [
        "1 shortfall that was accepted on adoption is there no more; `gatecheck adopt` takes such entries off "
        "gatecheck.accepted.yaml."
    ]
    assert (status, entries) == (1, 1)
    assert told.startswith(
        "gatecheck.accepted.yaml lists 1 shortfall; taken off it: 1 entry. A list that is there only gets shorter, "
        "so that what falls short anew is not accepted unseen; to accept what falls short now, delete the file and "
        "adopt again. Falls short of the policy: 1 of 3 claims"
    )
    assert again[1].startswith("gatecheck.accepted.yaml lists 1 shortfall; taken off it: 0 entries.")


def test_what_cannot_be_judged_is_not_accepted(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What can be accepted is; the rest still blocks, and an unreadable record loses no entry."""
    (station / "r001.json").write_text(json.dumps(changed(YIELD, id="un", test=..., estimate=...)), "utf-8")

    undecided, told = said(capsys, "adopt", str(station))
    (station / "r001.json").unlink()
    settled = said(capsys, "adopt", str(station))[0]
    (station / "r000.json").write_text('{"gatecheck": "record/1", "id": "yield_2030",', encoding="utf-8")
    unreadable, again = said(capsys, "adopt", str(station))

    assert undecided == 3
    assert told.startswith("Accepted 1 shortfall of 1 record in gatecheck.accepted.yaml")
    assert "Cannot judge: 1 of 2 claims undecided" in told
    assert settled == 0
    assert unreadable == 3
    assert again.startswith("gatecheck.accepted.yaml lists 1 shortfall; taken off it: 0 entries.")


def test_where_nothing_blocks_nothing_is_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = write_tree(tmp_path, strong("a"))

    assert said(capsys, "adopt", str(folder)) == (
        0,
        "Nothing that blocks is short of the policy, so gatecheck.accepted.yaml was not written.",
    )
    assert not (folder / ACCEPTED_FILE).exists()


def test_under_a_policy_that_cannot_be_read_nothing_is_written(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = write_tree(tmp_path, YIELD, policy={"gatecheck": "policy/1", "rules": {"x": {}}})

    status, told = said(capsys, "adopt", str(folder))

    assert status == 3
    assert "rules.x is no known rule" in told
    assert not (folder / ACCEPTED_FILE).exists()


def test_another_policy_may_be_named(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    loose = changed(POLICY, rules={RULE: {"limit": 0.9}})
    (station / "loose.json").write_text(json.dumps(loose), encoding="utf-8")

    status, told = said(capsys, "adopt", str(station), "--policy", str(station / "loose.json"))

    assert (status, told.startswith("Nothing that blocks")) == (0, True)


def test_a_broken_list_is_not_written_over(station: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (station / ACCEPTED_FILE).write_text("gatecheck: accepted/1\naccepted: 7\n", encoding="utf-8")

    status = main(["adopt", str(station)])

    assert status == 3
    assert "gatecheck.accepted.yaml:2: accepted is 7, not a list" in capsys.readouterr().err
    assert (station / ACCEPTED_FILE).read_text(encoding="utf-8") == "gatecheck: accepted/1\naccepted: 7\n"


def test_a_stale_result_falls_short(tmp_path: Path) -> None:
    """The data change in a request and the record does not, with all its figures in agreement."""
    folder = tmp_path / "repository"
    (folder / "data").mkdir(parents=True)
    plots = folder / "data" / "plots_2031.csv"
    plots.write_bytes(b"plot,yield\n1,4.2\n")
    then = hashlib.sha256(plots.read_bytes()).hexdigest()
    inputs = [{"path": "data/plots_2031.csv", "sha256": then}]
    policy = changed(POLICY, rules={"fresh": {}})
    record = strong("yield_2031", provenance={"code": "analysis.py", "inputs": inputs})
    write_tree(folder, record, policy=policy)
    base = commit_all(folder, "base")
    fresh = weigh(folder, "--base", "HEAD")
    plots.write_bytes(b"plot,yield\n1,4.3\n")
    commit_all(folder, "other data")

    stale = weigh(folder, "--base", base)

    now = hashlib.sha256(plots.read_bytes()).hexdigest()
    finding = stale.rule("fresh", "yield_2031")
    assert fresh.status == 0
    assert (stale.status, finding["outcome"]) == (1, "short")
    assert finding["message"] == (
        f"Result made from other data than committed: data/plots_2031.csv has the SHA-256 digest {now[:12]}…, and "
        f"the record says {then[:12]}…; the policy wants results made from what is here."
    )
    assert finding["remedy"] == "Rerun analysis.py, and commit the record that it writes."


def test_an_audit_finds_the_same_verdict_years_later(
    station: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """At a tag, in another clone and on another day: the same bytes, the waiver that applied then included."""
    grant(station, digest_told(capsys, station))
    commit(station, "2021-05-04")
    git(station, "tag", "report-2021")
    then = weigh(station)
    first = (tmp_path / "station.verdict.json").read_bytes()
    commit(station, "2022-01-01")
    clone = tmp_path / "audit"
    git(tmp_path, "clone", "-q", "--branch", "report-2021", str(station), str(clone))
    weigh(clone)
    again = (tmp_path / "audit.verdict.json").read_bytes()

    policy = changed(POLICY, rules={RULE: {"limit": 0.04}})
    monkeypatch.setattr(gate, "__version__", "9.9.9")
    (clone / "gatecheck.yaml").write_text(json.dumps(policy), encoding="utf-8")
    shutil.copy(tmp_path / "audit.verdict.json", tmp_path / "kept.json")
    weigh(clone)

    same = said(capsys, "compare", str(tmp_path / "station.verdict.json"), str(tmp_path / "kept.json"))
    other, told = said(capsys, "compare", str(tmp_path / "kept.json"), str(tmp_path / "audit.verdict.json"))
    assert then.status == 0
    assert again == first
    assert (same[0], same[1].startswith("The two verdicts say the same of every claim and rule (1 record).")) == (
        0,
        True,
    )
    assert other == 1
    version = then.verdict["tool"]["version"]
    assert f"tool: gatecheck {version} in the first, gatecheck 9.9.9 in the second" in told
    assert (
        "(false-positive-risk): outcome: waived in the first, short in the second; limit: 0.05 in the first, "
        in told
    )
