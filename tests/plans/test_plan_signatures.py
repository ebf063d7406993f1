"""Signed tags and commits on a sealed plan, by keys that the base lists; judged by exit status, never by words."""

from __future__ import annotations

import subprocess
from pathlib import Path

import pytest
from plans.planting import DATA, FILE, Station, hypothesis, record
from plans.signing import SIGNERS, allowed, key, signing
from support import git

from gatecheck import git as ours
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.plans import signatures

NO_KEY = "no signature on it is by a key that counts at its date"


@pytest.fixture
def pair(tmp_path: Path) -> Path:
    return key(tmp_path)


@pytest.fixture
def listed(station: Station, pair: Path) -> Station:
    """A station whose base lists the key."""
    station.settings = PlanSettings(signers=SIGNERS)
    station.put(SIGNERS, allowed(pair))
    return station


def test_a_signed_tag(listed: Station, pair: Path) -> None:
    sealed = listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    data = listed.data()

    graded = listed.grade()
    assert graded.grade == "signed"
    assert graded.because == (
        f"sealed in {sealed[:12]} on the base's first-parent line, before {data[:12]} first added data/plots.csv, "
        "and signed in the tag drainage-plan by a key that the base lists; holds unless someone with the right to "
        "push rewrote that branch and a holder of such a key signed it afterwards, as the date of a signature is "
        "the signer's own word"
    )
    assert graded.advice == "add a time-stamp token on the seal as plans/drainage.yaml.tsr"


def test_a_signed_commit(listed: Station, pair: Path) -> None:
    listed.plan()
    listed.write("notes.txt", "later, and still before the data\n")
    git(listed.root, "add", "-A")
    signing(listed, pair, "commit", "-q", "-S", "-m", "signed")
    signed = git(listed.root, "rev-parse", "HEAD")
    listed.data()

    assert listed.grade().grade == "signed"
    assert f"signed in the commit {signed[:12]} by" in listed.grade().because


def test_a_tag_on_the_branch_that_was_merged(listed: Station, pair: Path) -> None:
    git(listed.root, "checkout", "-q", "-b", "study")
    listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    git(listed.root, "checkout", "-q", "main")
    git(listed.root, "merge", "-q", "--no-ff", "-m", "study", "study")
    listed.data()

    assert listed.grade().grade == "signed"


def test_a_tag_beside_the_line_on_another_version_does_not_count(listed: Station, pair: Path) -> None:
    git(listed.root, "checkout", "-q", "-b", "study")
    listed.write(FILE, hypothesis(sides=1))
    listed.commit()
    signing(listed, pair, "tag", "-s", "-m", "a draft", "draft")
    (listed.root / FILE).unlink()
    (listed.root / FILE).symlink_to("nowhere.yaml")
    listed.commit()
    signing(listed, pair, "tag", "-s", "-m", "a link", "link")
    (listed.root / FILE).unlink()
    listed.plan()
    git(listed.root, "checkout", "-q", "main")
    git(listed.root, "merge", "-q", "--no-ff", "-m", "study", "study")
    listed.data()

    graded = listed.grade()
    assert graded.grade == "repository-order"
    assert graded.because.endswith("; no signed commit or tag holds it")


@pytest.mark.parametrize("when", ["before the plan", "after the data"])
def test_a_tag_of_another_time_does_not_count(listed: Station, pair: Path, when: str) -> None:
    if when == "before the plan":
        signing(listed, pair, "tag", "-s", "-m", "start", "start")
    listed.plan()
    listed.data()
    if when == "after the data":
        signing(listed, pair, "tag", "-s", "-m", "release", "release")

    graded = listed.grade()
    assert graded.grade == "repository-order"
    assert graded.because.endswith("; no signed commit or tag holds it")


def test_the_key_of_somebody_else(listed: Station, tmp_path: Path) -> None:
    """Git says "Good" and fails: what it says is no evidence."""
    listed.plan()
    signing(listed, key(tmp_path, "other"), "tag", "-s", "-m", "registered", "drainage-plan")
    listed.data()
    says = subprocess.run(
        ["git", "-c", f"gpg.ssh.allowedSignersFile={listed.root / SIGNERS}", "verify-tag", "drainage-plan"],
        cwd=listed.root,
        capture_output=True,
        check=False,
        text=True,
    )

    assert (says.returncode, says.stderr.startswith('Good "git" signature')) == (1, True)
    assert listed.grade().grade == "repository-order"
    assert listed.grade().because.endswith(f"; {NO_KEY}")


def test_a_key_out_of_its_time(station: Station, pair: Path) -> None:
    station.settings = PlanSettings(signers=SIGNERS)
    station.put(SIGNERS, allowed(pair, ',valid-before="20200101"'))
    station.plan()
    signing(station, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    station.data()

    assert station.grade().grade == "repository-order"
    assert station.grade().because.endswith(f"; {NO_KEY}")


def test_a_tag_dated_back_into_the_time_of_its_key_is_its_signers_word(station: Station, pair: Path) -> None:
    """No check can tell, as the date is the signer's: so it is said."""
    station.settings = PlanSettings(signers=SIGNERS)
    station.put(SIGNERS, allowed(pair, ',valid-before="20200101"'))
    station.plan()
    signing(station, pair, "tag", "-s", "-m", "x", "drainage-plan", date="2019-06-01T00:00:00Z")
    station.data()

    assert station.grade().grade == "signed"
    assert "the date of a signature is the signer's own word" in station.grade().because


def test_signers_are_those_of_the_base_and_not_of_the_branch(station: Station, pair: Path) -> None:
    station.settings = PlanSettings(signers=SIGNERS)
    station.plan()
    signing(station, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    git(station.root, "checkout", "-q", "-b", "study")
    station.put(SIGNERS, allowed(pair))

    on_base, on_branch = station.grade(revision="main"), station.grade(revision="study")
    assert on_base.grade == "repository-order"
    assert on_base.because.endswith("; the file of signers keys/signers is not on the base")
    assert on_branch.grade == "signed"


def test_a_link_for_the_file_of_signers_is_not_followed(station: Station, pair: Path) -> None:
    station.settings = PlanSettings(signers=SIGNERS)
    (station.root / "keys").mkdir()
    (station.root / SIGNERS).symlink_to("../../signers")
    (station.root.parent / "signers").write_text(allowed(pair), encoding="ascii")
    station.plan()
    signing(station, pair, "tag", "-s", "-m", "registered", "drainage-plan")

    assert station.grade().grade == "repository-order"
    assert "the file of signers cannot be read: " in station.grade().because


def test_a_file_of_signers_outside_the_folder(station: Station, pair: Path) -> None:
    (station.root.parent / "signers").write_text(allowed(pair), encoding="ascii")
    station.settings = PlanSettings(signers="../signers")
    station.plan()

    assert station.grade().because.endswith("; the file of signers ../signers is not on the base")


def test_a_lightweight_tag_is_no_signature(listed: Station) -> None:
    listed.plan()
    git(listed.root, "tag", "light")
    git(listed.root, "tag", "-a", "-m", "not signed", "annotated")
    git(listed.root, "tag", "-a", "-m", "a tag of a tag", "twice", "annotated")
    listed.data()

    assert listed.grade().grade == "repository-order"
    assert listed.grade().because.endswith("; no signed commit or tag holds it")


@pytest.mark.parametrize("mark", ["PGP SIGNATURE", "PGP MESSAGE", "SIGNED MESSAGE"])
def test_signatures_of_other_kinds_are_not_judged(listed: Station, mark: str) -> None:
    """Whose keys count would be a matter of whoever runs it."""
    listed.plan()
    message = f"registered\n\n-----BEGIN {mark}-----\n\naaaa\n-----END {mark}-----\n"
    git(listed.root, "tag", "-a", "--cleanup=verbatim", "-m", message, "drainage-plan")
    listed.data()

    assert listed.grade().grade == "repository-order"
    assert listed.grade().because.endswith(
        "; only signatures of other kinds than SSH are on it, which are not judged"
    )


def test_a_forged_block_does_not_hold(listed: Station) -> None:
    listed.plan()
    block = "-----BEGIN SSH SIGNATURE-----\nU1NIU0lH\n-----END SSH SIGNATURE-----\n"
    git(listed.root, "tag", "-a", "--cleanup=verbatim", "-m", f"registered\n{block}", "drainage-plan")
    listed.data()

    assert listed.grade().grade == "repository-order"
    assert listed.grade().because.endswith(f"; {NO_KEY}")


def test_settings_of_the_repository_run_no_program_of_theirs(listed: Station, pair: Path, tmp_path: Path) -> None:
    trace, fake = tmp_path / "trace", tmp_path / "fake"
    fake.write_text(f"#!/bin/sh\ntouch {trace}\nexit 0\n", encoding="ascii")
    fake.chmod(0o755)
    listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    for name in ("gpg.program", "gpg.ssh.program", "gpg.x509.program", "gpg.openpgp.program"):
        git(listed.root, "config", name, str(fake))

    assert listed.grade().grade == "signed"
    assert not trace.exists()


def test_a_signature_does_not_replace_the_order(listed: Station, pair: Path) -> None:
    listed.write(DATA, "1\n")
    listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")

    assert listed.grade().grade == "self-declared"


def test_without_ssh_keygen_it_is_not_known(listed: Station, pair: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    listed.data()
    monkeypatch.setattr("shutil.which", lambda _: None)

    graded = listed.grade()
    assert (graded.grade, graded.at_least) == (None, "repository-order")
    assert graded.because.endswith("; a signature is on it, and ssh-keygen is not here to judge it")
    assert graded.advice == "install OpenSSH, whose ssh-keygen judges it"


def test_only_so_many_are_tried(
    listed: Station, pair: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(signatures, "MOST_TRIED", 2)
    other = key(tmp_path, "other")
    listed.plan()
    for name in ("a", "b"):
        signing(listed, other, "tag", "-s", "-m", "x", name)
    signing(listed, pair, "tag", "-s", "-m", "x", "c")
    listed.data()

    assert listed.grade().grade == "repository-order"
    assert listed.grade().because.endswith("; none of the first 2 of 3 signatures on it is by a key that counts")


def test_many_records_ask_git_once(listed: Station, pair: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    listed.plan()
    signing(listed, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    listed.data()
    asked: list[tuple[object, ...]] = []
    run = ours.run

    def noting(folder: Path, *words: str) -> tuple[int, bytes, str]:
        asked.append(words)
        return run(folder, *words)

    monkeypatch.setattr(ours, "run", noting)

    made = listed.promised(*(record(id=f"r{number}", provenance__made_at=f"20{number}0") for number in range(5)))
    assert [one.grade for one in made.promises if one] == ["signed"] * 5
    assert sum("verify-tag" in words for words in asked) == 1
