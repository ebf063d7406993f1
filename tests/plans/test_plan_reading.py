"""Plans are read from a tree, a revision or bytes; every fault is told, with file, line, field and advice."""

from __future__ import annotations

import json
import socket
from pathlib import Path
from typing import Any

import pytest
from plans.planting import FILE, PLAN, Station, hypothesis
from support import Document, changed, git

from gatecheck.errors import CannotJudge
from gatecheck.plans.canonical import whole_digest_of
from gatecheck.plans.reading import LONGEST, plan_of, plans_in_tree, read_plan, seal_of, tidy

Told = list[tuple[str, str, str]]
SECOND: Document = {"id": "H2", "text": "It lasts.", "family": "growth"}


def told(document: Any, name: str = "plans/p.json") -> Told:
    content = document if isinstance(document, bytes) else json.dumps(document, indent=1).encode()
    plan = plan_of(name, content)
    assert (plan.plan is None) == bool(plan.problems)
    return [(str(one.at), one.message, one.advice) for one in plan.problems]


def family(**changes: Any) -> Document:
    first = {**PLAN["hypotheses"][0], "family": "growth"}
    document = changed(PLAN, hypotheses=[first, SECOND], families={"growth": {"procedure": "holm"}})
    return changed(document, **changes)


def test_a_plan_in_order_has_no_fault() -> None:
    plan = plan_of("plans/p.json", json.dumps(family()).encode())

    assert plan.problems == ()
    assert plan.plan is not None
    assert [one.id for one in plan.plan.hypotheses] == ["H1", "H2"]
    assert plan.document == family()


def test_all_faults_of_the_shape_are_told_at_once() -> None:
    text = (
        "gatecheck: plan/1\nid: two words\ntitel: Soil\ndata: nothing\nhypotheses:\n"
        "- id: H1\n  text: x\n  alpha: '0.05'\n  alpha: 0.05\n- text: y\n"
    )

    assert told(text.encode(), "plans/p.yaml") == [
        ("plans/p.yaml:9", "hypotheses[0].alpha is given twice", "keep one of the two"),
        (
            "plans/p.yaml:3",
            "titel is no known key",
            "the nearest known one is title (known: data, families, gatecheck, hypotheses, id, title)",
        ),
        ("plans/p.yaml:2", "id is 'two words'", "give 1 to 200 characters without spaces"),
        ("plans/p.yaml:4", "data is 'nothing'", "known: collecting, none, seen, unseen"),
        ("plans/p.yaml:10", "hypotheses[1].id is missing", "give it: stable name of the hypothesis"),
        ("plans/p.yaml:1", "title is missing", "give it: title"),
    ]


@pytest.mark.parametrize(
    ("document", "message", "advice"),
    [
        (
            family(hypotheses=[PLAN["hypotheses"][0], {**SECOND, "id": "H1"}]),
            "hypotheses[1].id is 'H1', as that of hypotheses[0] is",
            "give each its own",
        ),
        (
            family(families={"grwth": {"procedure": "holm"}}, hypotheses=[SECOND]),
            "hypotheses[0].family is 'growth', which is not among families",
            "the nearest known one is grwth (known: grwth)",
        ),
        (
            family(families__growth={"procedure": "fixed-sequence", "order": ["H1", "H3", "H2"]}),
            "families.growth.order[1] is 'H3', which is no hypothesis of this family",
            "known: H1, H2",
        ),
        (
            family(families__growth={"procedure": "fixed-sequence", "order": ["H1", "H2", "H1"]}),
            "families.growth.order[2] is 'H1' a second time",
            "name each once",
        ),
        (
            family(families__growth={"procedure": "fixed-sequence", "order": ["H2"]}),
            "families.growth.order leaves out 'H1'",
            "order every hypothesis of the family",
        ),
        (
            family(families__growth={"procedure": "holm", "order": ["H1", "H2"]}),
            "families.growth.order is given where procedure is holm",
            "set procedure to fixed-sequence, or leave the order out",
        ),
        (
            hypothesis(sides=1, direction="either"),
            "hypotheses[0].direction is either where sides is 1",
            "say increase or decrease, or set sides to 2",
        ),
        (
            hypothesis(margin=[0.3, -0.3]),
            "hypotheses[0].margin is not [low, high] with low below high",
            "order its two numbers",
        ),
        (
            hypothesis(looks={"planned": 1, "boundary": "pocock"}),
            "hypotheses[0].looks.boundary is given for one look",
            "give the number of looks planned, or leave it out",
        ),
        (
            [],
            "the plan is a list, not an object",
            "write an object: A registration: what was promised before the data.",
        ),
        (
            hypothesis(text="x" * 10_001),
            "hypotheses[0].text is a text of 10001 characters",
            "keep it to 10000",
        ),
        (
            changed(PLAN, hypotheses=[0] * 10_000),
            "the plan has more than 10000 values",
            "keep tables of data apart from the record",
        ),
    ],
)
def test_what_fields_demand_of_each_other(document: Any, message: str, advice: str) -> None:
    (fault,) = told(document)

    assert fault[1:] == (message, advice)


@pytest.mark.parametrize(
    "document",
    [
        family(families__growth={"procedure": "fixed-sequence", "order": ["H2", "H1"]}),
        hypothesis(sides=1, direction="decrease", margin=[-0.3, "0.30"]),
        hypothesis(looks={"planned": 3, "boundary": "pocock"}, family="anything"),
        hypothesis(looks={"planned": 1}),
        changed(PLAN, hypotheses=...),
    ],
)
def test_what_is_in_order_is_read(document: Document) -> None:
    assert told(document) == []


@pytest.mark.parametrize(
    ("name", "content", "message"),
    [
        ("p.toml", b"", "the plan has a suffix that no reader of plans knows"),
        ("p.yaml", b"version https://git-lfs.github.com/spec/v1\noid sha256:0\n", "the plan is a Git LFS pointer"),
        ("p.yaml", b"a: 1\n---\nb: 2\n", "the plan holds 2 documents"),
        ("p.yaml", b"", "the plan holds 0 documents"),
        ("p.json", b"{", "the text is no JSON: Expecting property name enclosed in double quotes"),
        (
            "p.json",
            b" " * (LONGEST + 1),
            f"the file has {LONGEST + 1} bytes, and plans and their seals are read up to ",
        ),
        ("p.yaml", b"\xff\xfe", "the text is UTF-16 or UTF-32, not UTF-8"),
        ("p.yaml", b"gatecheck: plan/1\nx: &a [*a]\n", "x[0] holds itself through the anchor 'a'"),
        ("p.yaml", b"gatecheck: !!python/object/apply:os.system ['true']\n", "gatecheck has the tag "),
        ("p.yaml", b"a: " + b"[" * 70, "the text is nested more than 64 deep"),
        (
            "p.yaml",
            b"a: &a [1,1,1,1,1,1,1,1,1]\n"
            + b"".join(
                f"{y}: &{y} [{','.join(f'*{x}' for _ in range(9))}]\n".encode()
                for x, y in zip("abcdefg", "bcdefgh", strict=True)
            ),
            "the text has aliases that stand for more than 100000 values",
        ),
        ("p.yaml", b'"bad\\nkey\x1b": 1\n', "the text is no YAML: "),
        ("p.json", b'{"bad\\nkey": 1}', "bad\\nkey is no known key"),
    ],
)
def test_hostile_bytes_are_told_and_not_followed(name: str, content: bytes, message: str) -> None:
    problems = told(content, name)

    assert any(each[1].startswith(message) for each in problems), problems
    assert all(each[2] for each in problems)


def test_a_seal_is_read_likewise() -> None:
    seal, problems = seal_of("p.seal.json", b'{"gatecheck": "seal/1", "plan": "p", "id": "p", "digest": "sha1:0"}')

    assert seal is None
    (problem,) = problems
    assert problem.message == "digest is 'sha1:0'"
    assert problem.advice == "give sha256: and 64 hexadecimal digits, as `gatecheck seal` writes them"


def test_a_plan_is_read_from_the_tree_and_from_a_revision(station: Station) -> None:
    first = station.plan()
    station.write(FILE, hypothesis(sides=1))

    now, then = read_plan(station.root, f"./plans//{Path(FILE).name}"), read_plan(station.root, FILE, first)
    assert now is not None
    assert then is not None
    assert now.document == hypothesis(sides=1)
    assert then.document == PLAN
    assert read_plan(station.root, "plans/none.yaml") is None
    assert read_plan(station.root, "plans/none.yaml", first) is None
    with pytest.raises(CannotJudge, match="knows no revision nowhere"):
        read_plan(station.root, FILE, "nowhere")


@pytest.mark.parametrize("path", ["/etc/hostname", "../outside.json", "plans/../../outside.json", "..", "a\0b"])
def test_nothing_outside_the_folder_is_read(station: Station, path: str) -> None:
    (station.root.parent / "outside.json").write_text(json.dumps(PLAN), encoding="utf-8")

    assert tidy(path) is None
    assert read_plan(station.root, path) is None


def test_a_symbolic_link_is_not_followed(station: Station) -> None:
    (station.root.parent / "outside.json").write_text(json.dumps(PLAN), encoding="utf-8")
    (station.root / "plans").mkdir()
    (station.root / "plans/link.json").symlink_to("../../outside.json")
    (station.root / "linked").symlink_to("..")
    commit = station.commit()

    for revision in (None, commit):
        plan = read_plan(station.root, "plans/link.json", revision)
        assert plan is not None
        (problem,) = plan.problems
        assert "is a symbolic link" in problem.message
        assert problem.advice.startswith("commit the file itself")
    assert read_plan(station.root, "linked/outside.json") is None
    assert read_plan(station.root, "linked/outside.json", commit) is None


def test_the_plans_of_a_tree_are_found_by_what_they_declare(station: Station) -> None:
    station.write("plans/b.json", PLAN)
    station.write("plans/deep/a.yaml", "# first line\n\n" + json.dumps(hypothesis(sides=1)))
    station.write("plans/notes.yaml", "sampling: weekly\n")
    station.write("plans/broken.yaml", 'gatecheck: "plan/1"\nid: [\n')
    station.write("plans/faulty.yaml", "gatecheck: plan/1\nid: x\ntitle: T\ndata: none\nmore: 1\n")
    station.write("plans/other.json", {"gatecheck": "policy/1"})
    station.write("elsewhere/c.json", PLAN)
    (station.root / "plans/link.json").symlink_to("../../outside.json")
    (station.root / "plans/same.json").symlink_to("b.json")
    commit = station.commit()

    for revision in (None, commit):
        plans, problems = plans_in_tree(station.root, ("plans/**",), revision)
        assert plans[0].digest == whole_digest_of(PLAN)
        assert [(one.path, one.line, one.plan.id) for one in plans] == [
            ("plans/b.json", 1, "drainage"),
            ("plans/deep/a.yaml", 3, "drainage"),
        ]
        assert [(str(one.at), one.message) for one in problems] == [
            ("plans/broken.yaml:3", "the text is no YAML: did not find expected node content"),
            ("plans/faulty.yaml:5", "more is no known key"),
            ("plans/link.json:1", "a symbolic link out of the tree is not followed"),
        ]


def test_a_plan_that_became_a_link_or_is_gone(station: Station) -> None:
    station.plan()
    station.put("plans/gone.json", PLAN)
    (station.root / "plans/gone.json").unlink()
    (station.root / FILE).unlink()
    (station.root / FILE).symlink_to("nowhere.yaml")

    plans, problems = plans_in_tree(station.root, ("plans/**",))
    assert plans == ()
    assert [str(one.at) for one in problems] == [f"{FILE}:1"]


def test_a_plan_that_cannot_be_opened(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    with socket.socket(socket.AF_UNIX) as door:
        door.bind("p.yaml")

        plan = read_plan(tmp_path, "p.yaml")
        _, problems = plans_in_tree(tmp_path, ("**",))
    assert plan is not None
    assert plan.problems == problems
    assert [(one.message, one.advice) for one in problems] == [
        ("the file cannot be opened (No such device or address)", "mend its permissions")
    ]


def test_a_name_that_no_file_can_have(station: Station) -> None:
    commit = station.plan()

    assert read_plan(station.root, f"plans/{'x' * 300}.yaml") is None
    assert read_plan(station.root, f"plans/{'x' * 300}.yaml", commit) is None


def test_a_file_beyond_all_measure_is_no_plan(station: Station) -> None:
    station.plan()
    with (station.root / FILE).open("r+b") as file:
        file.truncate(257 << 20)  # a hole, which takes no room

    plans, problems = plans_in_tree(station.root, ("plans/*.yaml",))
    assert plans == ()
    assert [one.message for one in problems] == [
        f"the file has {257 << 20} bytes, and plans and their seals are read up to {LONGEST}"
    ]


def test_a_plan_whose_content_is_not_here(station: Station) -> None:
    """As in a partial clone; here the object is taken away."""
    station.plan()
    name = git(station.root, "rev-parse", f"HEAD:{FILE}")
    (station.root / ".git/objects" / name[:2] / name[2:]).unlink()

    plans, problems = plans_in_tree(station.root, ("plans/*.yaml",), "HEAD")
    assert plans == ()
    assert [(str(one.at), one.message, one.advice) for one in problems] == [
        (f"{FILE}:1", "the content of the file is not in this clone", "clone without --filter")
    ]


def test_a_plan_in_a_folder_without_git(tmp_path: Path) -> None:
    (tmp_path / "plans").mkdir()
    (tmp_path / FILE).write_text(json.dumps(PLAN), encoding="utf-8")

    plans, problems = plans_in_tree(tmp_path, ("plans/**",))
    assert [one.path for one in plans] == [FILE]
    assert problems == ()
    assert git(tmp_path, "--version").startswith("git version")
