"""Records of odd figures, however large, small or out of place, are compared and told without a fault."""

from __future__ import annotations

import copy
import json
import random
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
from consistent_records import KINDS, Document
from support import POLICY, weigh, write_tree

from gatecheck.schema.records import read_record

ODD = (
    0, 1, -1, 2, 0.5, 1e15, 1e300, 1e-300, 1e308, "1e-308", "1e300", "<0.05", ">3", "0", "-0.0", "000.10", ".5",
)  # fmt: skip
SHORT_RULES = {"numbers-agree", "planned-split"}


def _places(found: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    if isinstance(found, dict):
        for key, value in found.items():
            yield from _places(value, (*path, key))
    elif isinstance(found, list):
        for place, value in enumerate(found):
            yield from _places(value, (*path, place))
    else:
        yield path


def _odd(document: Document, chance: random.Random) -> Document:
    made = copy.deepcopy(document)
    for _ in range(chance.randint(1, 3)):
        *outer, last = chance.choice([path for path in _places(made) if path[-1] not in {"name", "statistic"}])
        place: Any = made
        for step in outer:
            place = place[step]
        place[last] = chance.choice(ODD)
    if "sample" in made and chance.random() < 0.3:
        made["sample"]["planned_split"] = [1, chance.choice([1, 3, 1e300, 1e-300])]
    return made


def test_odd_figures_are_compared_and_told(tmp_path: Path) -> None:
    chance, generator = random.Random(5), np.random.default_rng(8)  # noqa: S311  # seeds that can be repeated
    made = [_odd(make(generator), chance) for make in KINDS.values() for _ in range(40)]
    named = [
        {"gatecheck": "record/1", "id": f"odd/{n}", "claim": "It differs.", **each} for n, each in enumerate(made)
    ]
    legal = [each for each in named if read_record(each)[0] is not None]
    folder = write_tree(tmp_path, policy=POLICY)
    (folder / "records.json").write_text(json.dumps(legal), encoding="utf-8")

    answer = weigh(folder)

    said = [rule for claim in answer.verdict["claims"] for rule in claim["rules"] if rule["rule"] in SHORT_RULES]
    short = [rule for rule in said if rule["outcome"] == "short"]
    assert len(answer.verdict["claims"]) == len(legal) > 200
    assert len(short) > 100
    for rule in short:
        assert rule["message"]
        assert "nan" not in rule["message"]
        assert f"{rule['message']} {rule['remedy']}".count(". ") <= 2
