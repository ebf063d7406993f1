"""Classes of data are written when they are first needed, and then behave as dataclasses."""

from __future__ import annotations

import dataclasses
from concurrent.futures import ThreadPoolExecutor
from threading import Barrier

import pytest

from gatecheck.model.struct import struct


@struct
class Plot:
    """A field plot."""

    name: str
    worms: int = 3
    depths: list[int] = dataclasses.field(default_factory=list)


@struct
class Fenced(Plot):
    """A plot with a fence, whose own class is asked first."""

    posts: int = 4


def test_fields_of_a_class_that_was_never_made_are_known() -> None:
    @struct
    class Fresh:
        first: str
        second: int = 2

    fields = dataclasses.fields(Fresh)
    assert [(each.name, each.default) for each in fields] == [("first", dataclasses.MISSING), ("second", 2)]
    assert Fresh("a").first == "a"


def test_a_class_takes_the_fields_of_the_one_that_it_extends() -> None:
    fenced = Fenced("north", posts=6)
    assert (fenced.name, fenced.worms, fenced.depths, fenced.posts) == ("north", 3, [], 6)
    assert [each.name for each in dataclasses.fields(Fenced)] == ["name", "worms", "depths", "posts"]


def test_what_it_is_made_of_is_asked_for_by_name() -> None:
    with pytest.raises(TypeError, match="missing 1 required positional argument: 'name'"):
        Plot()  # type: ignore[call-arg]
    with pytest.raises(TypeError, match="unexpected keyword argument 'snails'"):
        Plot("north", snails=2)  # type: ignore[call-arg]


def test_instances_are_themselves_and_can_be_replaced() -> None:
    plot = Plot("north", depths=[10])
    other = dataclasses.replace(plot, worms=5)
    assert plot != Plot("north", depths=[10])
    assert (other.name, other.worms, other.depths) == ("north", 5, [10])
    assert Plot("south").depths is not Plot("south").depths


def test_many_threads_may_make_the_first_ones() -> None:
    threads, rounds = 4, 50

    def make(start: Barrier, cls: type[Plot], number: int) -> int:
        start.wait()
        return cls("north", number).worms

    with ThreadPoolExecutor(threads) as pool:
        for _ in range(rounds):
            cls: type[Plot] = struct(type("Plot", (), {"__annotations__": {"name": str, "worms": int}}))
            start = Barrier(threads)
            made = list(pool.map(make, [start] * threads, [cls] * threads, range(threads)))
            assert made == [0, 1, 2, 3]


def test_who_was_about_to_make_the_first_one_makes_the_second() -> None:
    """As a thread does that comes to it when another has written the class."""

    @struct
    class Fresh:
        first: str

    about_to = Fresh.__init__
    assert Fresh("a").first == "a"
    second = Fresh.__new__(Fresh)
    about_to(second, "b")
    assert second.first == "b"
    assert Fresh.__init__ is not about_to
