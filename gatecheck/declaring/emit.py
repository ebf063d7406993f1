"""`declare`: one call that turns a result of analysis code into a result record."""

from __future__ import annotations

import inspect
import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any, Required, TypedDict, Unpack

from gatecheck.declaring.adapt import derive
from gatecheck.declaring.derived import Derived, Given
from gatecheck.declaring.errors import DeclareError, incomplete
from gatecheck.declaring.needs import unmet_needs
from gatecheck.declaring.notebook import Display
from gatecheck.declaring.provenance import provenance, software
from gatecheck.declaring.sample import with_groups, with_n
from gatecheck.declaring.tails import with_sides
from gatecheck.declaring.values import in_contract_order, merged, plain
from gatecheck.declaring.write import record_path, write
from gatecheck.model.record import Aim, Record, Role, Status, StudyDesign
from gatecheck.schema.read import nearest_advice
from gatecheck.schema.records import read_record
from gatecheck.schema.shapes import form_of

Object = Mapping[str, Any]


class Fields(TypedDict, total=False):
    """What the caller says of a result; all but the last four are the fields of `record/1`."""

    id: Required[str]
    claim: str | None
    status: Status
    role: Role
    aim: Aim
    harm: bool
    aliases: Iterable[str]
    tags: Iterable[str]
    test: Object
    estimate: Object
    sample: Object
    alternative: Object
    prior: Object
    family: Object
    screen: Object
    replicates: str
    compares: Iterable[str]
    design: StudyDesign
    outcome: Object
    population: str
    covariates: Iterable[str]
    look: Object
    plan: Object
    deviations: Iterable[Object]
    inputs: Iterable[str | os.PathLike[str] | Object]
    made_at: bool | datetime
    coefficient: str
    folder: str | os.PathLike[str] | None


_DISPLAY = Display()
_NO_FIELDS_OF_RECORD = {"inputs", "made_at", "coefficient", "folder"}


@dataclass(frozen=True, slots=True, repr=False)
class Declared:
    """A record that was declared: the document, and the file that holds it (`None`: it was not written)."""

    document: dict[str, Any]
    path: Path | None

    def __repr__(self) -> str:
        where = "not written to a file" if self.path is None else f"in {self.path}"
        return f"<record {self.document['id']!r}, {where}>"


def declare(result: object = None, **fields: Unpack[Fields]) -> Declared:
    """Declare a result: write its record, and in a notebook show it with what the gate will say of it.

    Statistic, df, p, sides, estimate, interval and sample size are taken from `result` where it tells them;
    what is given beside it is laid over that, member by member (`None` removes a member). What neither tells
    and a claim needs is asked for by name.

    Parameters
    ----------
    result : object
        What a test of scipy.stats returns; a fit or an analysis-of-variance table of statsmodels, with
        `coefficient`; a tuple (statistic, p) or (t, p, df); or nothing, where `test` and `estimate` give
        plain numbers.
    id : str
        Stable name of the result, and name of its file: `soil/worms` is `results/soil/worms.record.json`.
    claim : str, optional
        The sentence that the team asserts on this result. Without it nothing is claimed.
    status, role, aim, harm, aliases, replicates, compares, design, tags, outcome, population, covariates
        The fields of the same name of `record/1`.
    alternative, prior, family, screen, look, plan, deviations
        The fields of the same name of `record/1`.
    test, estimate : mapping, optional
        The fields of the same name of `record/1`, whole or in part. Intervals are taken from a result at
        level 0.95.
    sample : mapping, optional
        The field of the same name of `record/1`. `groups` may also be a mapping from a group's name to the
        values analysed, or to {'n': ..., 'mean': ..., 'sd': ...}.
    inputs : paths, optional
        Files that the result was computed from; they are hashed.
    made_at : bool or datetime, optional
        `True` records the time. Without it a record holds none, so a repeated analysis gives the same bytes.
    coefficient : str, optional
        The coefficient of a fit, or the row of a table, that is declared.
    folder : path, optional
        Where the file goes, relative to the current folder (default: "results"). `None` writes no file, for a
        notebook whose output is the record.

    Returns
    -------
    Declared
        The document as it stands in the file, and the path of that file.

    Raises
    ------
    DeclareError
        The record cannot be made from what was given. Nothing was written then.

    Examples
    --------
    >>> declare(  # doctest: +SKIP
    ...     scipy.stats.ttest_ind(drained, undrained),
    ...     id="soil/worms",
    ...     claim="Drained plots hold more earthworms.",
    ...     estimate={"unit": "g/m2"},
    ...     sample={"unit": "plot", "groups": {"drained": drained, "undrained": undrained}},
    ... )
    <record 'soil/worms', in results/soil/worms.record.json>
    """
    _refuse_unknown(fields)
    versions = _DISPLAY.of_analysis(software(result), result)
    origin = provenance(inspect.stack(0)[1].filename, fields.get("inputs", ()), fields.get("made_at", False))
    document, derived = _document(result, fields)
    document["provenance"] = plain({**origin, "software": versions})
    ordered = in_contract_order(document, form_of(Record))
    _refuse_faults(ordered, derived)
    folder = fields.get("folder", "results")
    path = None if folder is None else record_path(folder, ordered["id"])
    standing = ordered if path is None else write(ordered, path)
    _DISPLAY.show(standing, path)
    return Declared(standing, path)


def _refuse_unknown(fields: Object) -> None:
    for name in fields:
        if name not in Fields.__annotations__:
            raise DeclareError(f"declare takes no {name}: {nearest_advice(name, Fields.__annotations__)}")


def _document(result: object, fields: Fields) -> tuple[dict[str, Any], Derived]:
    """Return the record without its provenance, and what the result said."""
    said = {name: value for name, value in fields.items() if name not in _NO_FIELDS_OF_RECORD}
    sample = with_groups(said.get("sample", {}))
    given = Given(_mapping(said.get("test")), _mapping(sample), fields.get("coefficient"))
    derived = derive(result, given)
    test = plain(merged(derived.test, said.get("test")))
    if derived.test and isinstance(test, dict):
        test = with_sides(test)
    if isinstance(sample, dict):
        sample = with_n(sample, _mapping(test), derived)
    estimate = plain(merged(derived.estimate, said.get("estimate")))
    found = {"test": test, "estimate": estimate, "sample": sample}
    filled = {name: value for name, value in found.items() if value != {}}
    said = {name: value for name, value in said.items() if name not in found}
    return {"gatecheck": "record/1", "status": "exploratory"} | plain(_listed(said)) | filled, derived


def _listed(said: Object) -> Object:
    """Return what was said with each tuple or generator of the list fields as a list."""
    lists = {name for name in ("aliases", "tags", "deviations") if _is_series(said.get(name))}
    return {name: list(value) if name in lists else value for name, value in said.items()}


def _is_series(value: Any) -> bool:
    return isinstance(value, Iterable) and not isinstance(value, str | Mapping)


def _mapping(value: Any) -> Object:
    return value if isinstance(value, Mapping) else {}


def _refuse_faults(document: dict[str, Any], derived: Derived) -> None:
    record, faults = read_record(document)
    needed = tuple(unmet_needs(document, derived)) if record is not None else ()
    if faults or needed:
        raise incomplete(document.get("id"), (*faults, *needed))
