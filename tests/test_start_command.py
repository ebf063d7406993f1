"""Command `start`: a policy for a kind of team, an example record, and the file of the build that judges both."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
import yaml
from support import commit_all, git, weigh

from gatecheck.arguments import TEAMS
from gatecheck.cli import main
from gatecheck.policies import standing_policy
from gatecheck.starting import BUILDS, host_of

PROJECT = Path(__file__).parents[1]
FIRST = ["gatecheck.yaml was written.", "results/example.record.json was written."]
NEXT = "Next: `gatecheck weigh`, then put the records of your own analyses in place of the example."


def started(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, list[str], str]:
    """The exit status, the sentences and the complaint of one call."""
    status = main(["start", *arguments])
    streams = capsys.readouterr()
    return status, streams.out.splitlines(), streams.err


def test_a_first_policy_and_record_stand_and_nothing_is_overwritten(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert started(capsys, str(tmp_path)) == (0, [*FIRST, NEXT], "")
    assert weigh(tmp_path).status == 0

    (tmp_path / "gatecheck.yaml").write_text("mine", encoding="utf-8")
    _, out, _ = started(capsys, str(tmp_path), "--team", "clinical")
    assert out[0] == "gatecheck.yaml is there already and was left as it is."
    assert (tmp_path / "gatecheck.yaml").read_text(encoding="utf-8") == "mine"


def test_where_it_cannot_write_it_says_so(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "results").write_text("a file", encoding="utf-8")

    assert started(capsys, str(tmp_path))[::2] == (
        3,
        "gatecheck: cannot judge: results/example.record.json cannot be written (File exists); "
        "make the folder writable.\n",
    )
    status, _, complaint = started(capsys, str(tmp_path / "no"))
    assert (status, "is not a folder" in complaint) == (3, True)


#: What the example, t(58) = 3.62 with p = 0.00062, comes to under the policy of each kind of team.
EXAMPLE = {
    "clinical": (1, "registered"),
    "laboratory": (0, ""),
    "online-experiments": (1, "registered"),
    "screening": (1, "false-positive-risk"),
    "official-statistics": (3, "fresh"),
    "model-evaluation": (3, "fresh"),
}


@pytest.mark.parametrize("team", TEAMS)
def test_each_kind_of_team_has_a_policy_without_fault(
    team: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert started(capsys, str(tmp_path), "--team", team)[0] == 0

    text = (tmp_path / "gatecheck.yaml").read_text(encoding="utf-8")
    standing = standing_policy(tmp_path, None, None)
    assert standing.problems == ()
    assert standing.used is not None
    assert "reporting policy" in standing.used.name
    assert text.splitlines()[0].startswith("# The reporting policy of a")
    answer = weigh(tmp_path)
    status, rule = EXAMPLE[team]
    blocking = [
        each["rule"]
        for claim in answer.verdict["claims"]
        for each in claim["rules"]
        if each["outcome"] in {"short", "undecided"} and each["enforce"] == "block"
    ]
    assert (answer.status, rule in blocking or not rule) == (status, True)


def test_each_policy_says_how_likely_a_real_effect_is_and_why() -> None:
    """Priors are starting points to edit, and never silent."""
    for team in TEAMS:
        text = (PROJECT / "gatecheck" / "starting" / "teams" / f"{team}.yaml").read_text(encoding="utf-8")
        before = text[: text.index("evidence:")].rstrip().splitlines()[-1]
        assert before.startswith("# "), team
        assert any(word in before for word in ("prior", "1 in", "odds")), team


@pytest.mark.parametrize(
    ("mark", "host"), [(".github/x", "github"), (".gitlab-ci.yml", "gitlab"), (".gitlab/x", "gitlab")]
)
def test_the_host_is_known_by_its_files(mark: str, host: str, tmp_path: Path) -> None:
    (tmp_path / mark).parent.mkdir(exist_ok=True)
    (tmp_path / mark).write_text("", encoding="utf-8")

    assert host_of(tmp_path) == host


@pytest.mark.parametrize(
    ("address", "host"),
    [
        ("git@github.com:OWNER/analysis.git", "github"),
        ("https://gitlab.example.invalid/group/analysis.git", "gitlab"),
        ("https://git.example.invalid/analysis.git", None),
    ],
)
def test_the_host_is_known_by_a_remote(address: str, host: str | None, tmp_path: Path) -> None:
    commit_all(tmp_path, "first")
    git(tmp_path, "remote", "add", "origin", address)

    assert host_of(tmp_path) == host


def test_a_folder_within_a_repository_gets_no_build(tmp_path: Path) -> None:
    commit_all(tmp_path, "first")
    git(tmp_path, "remote", "add", "origin", "git@github.com:OWNER/analysis.git")
    (tmp_path / "inner").mkdir()

    assert (host_of(tmp_path), host_of(tmp_path / "inner")) == ("github", None)


@pytest.mark.parametrize("host", BUILDS)
def test_the_file_of_the_build_is_written_once(
    host: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    commit_all(tmp_path, "first")
    git(tmp_path, "remote", "add", "origin", f"https://{host}.com/OWNER/analysis.git")
    place = BUILDS["github"] if host == "github" else BUILDS["gitlab"]

    _, out, _ = started(capsys, str(tmp_path))
    assert out[2].startswith(f"{place} was written. Put the ")
    document = yaml.safe_load((tmp_path / place).read_text(encoding="utf-8"))
    history = (
        document["jobs"]["claims"]["steps"][0]["with"]["fetch-depth"] == 0
        if host == "github"
        else document["gatecheck"]["variables"]["GIT_DEPTH"] == "0"
    )
    assert history

    _, out, _ = started(capsys, str(tmp_path))
    assert out[2].startswith(f"{place} is there already")


def test_templates_are_all_used() -> None:
    """A policy that no option names, or a build without a host, would never be written."""
    starting = PROJECT / "gatecheck" / "starting"

    assert {path.stem for path in (starting / "teams").iterdir()} == set(TEAMS)
    assert {path.stem for path in (starting / "hosts").iterdir()} == set(BUILDS)
    assert os.path.lexists(starting / "gatecheck.yaml")
