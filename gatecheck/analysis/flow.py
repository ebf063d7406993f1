"""What happens to the results of tests in one file: which are declared, and how often each is made.

A reader of a language walks over its code and tells this what it meets. Names hold results as assignments hand
them on; nothing is run. Where the text does not say, the answer leans to what accuses nobody: a result that may
have been declared was, and a test that may not have been made was not.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from typing import Literal

from gatecheck.model.code import CalledTest

#: What a name holds: results of calls by their place, or what is handed to a parameter of a function.
Key = tuple[int, int, int, str]
Keys = frozenset[Key]
SiteKind = Literal["test", "model", "fit"]
NOTHING: Keys = frozenset()
#: What a name that holds so many results is given on top is followed no further, and may have been declared.
_MOST_HELD = 1_000
#: More tests than this are not told apart.
_MOST = 1_000_000


@dataclass(frozen=True, slots=True)
class Times:
    """How often something is made: `known` times at least, and with `more` possibly more often."""

    known: int = 1
    more: bool = False

    def __mul__(self, other: Times) -> Times:
        return Times(min(self.known * other.known, _MOST), self.more or other.more)

    def __add__(self, other: Times) -> Times:
        return Times(min(self.known + other.known, _MOST), self.more or other.more)


@dataclass(frozen=True, slots=True)
class Context:
    """Where the reader stands: in which function, how often this is run there, and in what kind of place.

    `chosen` is one of several branches, `looped` inside any loop, `simulated` inside one that draws random numbers.
    """

    within: str = ""
    times: Times = field(default_factory=Times)
    chosen: bool = False
    looped: bool = False
    simulated: bool = False

    def loop(self, length: int | None, *, draws: bool = False) -> Context:
        """Inside a loop of `length` rounds, where that is known."""
        rounds = Times(length) if length else Times(1, more=True)
        return replace(self, times=self.times * rounds, looped=True, simulated=self.simulated or draws)

    def branch(self, *, first: bool, alone: bool) -> Context:
        """Inside a branch, which is `alone` where there is no other; of several the first one counts."""
        known = min(self.times.known, 1) if first else 0
        more = self.times.more or self.looped or not first
        return replace(self, times=Times(known, more), chosen=self.chosen or not alone)

    def perhaps(self) -> Context:
        """Inside what may not be run at all."""
        return replace(self, times=Times(0, more=True))


@dataclass(slots=True)
class Site:
    """One place that calls a test or fits a model; a fit counts once someone looks at its tests."""

    key: Key
    kind: SiteKind
    name: str
    test: str | None
    context: Context
    times: Times
    declared: bool = False
    looked_at: bool = False
    ids: list[tuple[str, ...]] = field(default_factory=list)


@dataclass(slots=True)
class Learned:
    """What is known of the functions of a file after it has been read once."""

    returns: dict[str, Keys] = field(default_factory=dict)
    declaring: set[str] = field(default_factory=set)
    looking: set[str] = field(default_factory=set)
    drawing: set[str] = field(default_factory=set)
    defined: Counter[str] = field(default_factory=Counter)


class Flow:
    """The results of one file while it is read; `learned` is what a first reading found of its functions."""

    def __init__(self, learned: Learned | None = None) -> None:
        self.before = Learned() if learned is None else learned
        self.learned = Learned()
        self.context = Context()
        self.checks = 0
        #: Names that hold a result somewhere, or that the reader knows for others that matter.
        self.words: set[str] = set()
        #: Names of functions that the file defines: anywhere, once it has been read, and so far before.
        self.functions = set(self.before.defined)
        self._holds: dict[str, Keys] = {}
        self._changed: list[dict[str, Keys]] = [{}]
        self._sites: dict[Key, Site] = {}
        self._of_kind: dict[SiteKind, set[Key]] = defaultdict(set)
        self._calls: dict[str, list[tuple[str, Times]]] = defaultdict(list)

    @contextmanager
    def inside(self, context: Context) -> Iterator[None]:
        """Read on in another context."""
        outer, self.context = self.context, context
        try:
            yield
        finally:
            self.context = outer

    @contextmanager
    def function(self, name: str, parameters: Iterable[str]) -> Iterator[None]:
        """Read the body of a function, whose parameters hold what it is called with."""
        self.learned.defined[name] += 1
        self.functions.add(name)
        with self._undone(), self.inside(Context(name)):
            for each in parameters:
                self.bind(each, frozenset({_parameter(name)}))
            yield

    def branches(self, bodies: Sequence[Callable[[], Keys]], *, may_pass: bool) -> Keys:
        """Read branches of which one is run: after them a name may hold what any of them gave it.

        With `may_pass` it may be that none of them is run.
        """
        held = NOTHING
        given: list[dict[str, Keys]] = [{}] if may_pass else []
        for number, body in enumerate(bodies):
            context = self.context.branch(first=number == 0, alone=len(bodies) == 1)
            with self._undone() as changed, self.inside(context):
                held |= body()
                given.append({name: self.held(name) for name in changed})
        for name in dict.fromkeys(name for one in given for name in one):
            before = self.held(name)
            self.bind(name, NOTHING.union(*(one.get(name, before) for one in given)))
        return held

    @contextmanager
    def _undone(self) -> Iterator[dict[str, Keys]]:
        """Take back afterwards what names are given inside; yields the names with what they held before."""
        changed: dict[str, Keys] = {}
        self._changed.append(changed)
        yield changed
        self._changed.pop()
        for name, keys in changed.items():
            self._holds[name] = keys

    def met(self, site: Site) -> Keys:
        """Note a site; one in a loop that draws random numbers is a simulation, and tests nothing."""
        if not site.context.simulated:
            self._sites[site.key] = site
            self._of_kind[site.kind].add(site.key)
        return frozenset({site.key})

    def of_kind(self, keys: Keys, kind: SiteKind) -> Keys:
        """Those of `keys` that are models, or fits of them."""
        return keys & self._of_kind.get(kind, NOTHING) if keys else NOTHING

    def declare(self, keys: Keys, identifier: tuple[str, ...] | None) -> None:
        """The results go to `declare`, with an id that has these texts around what is filled in."""
        for key in keys:
            site = self._sites.get(key)
            if site is not None:
                site.declared = site.looked_at = True
                site.ids += [] if identifier is None else [identifier]
            elif _is_parameter(key):
                self.learned.declaring.add(key[3])

    def without_p(self, keys: Keys) -> Keys:
        """Nobody sees the p of these results, so that nothing is tested by them."""
        for key in keys:
            if key in self._sites and self._sites[key].kind == "test":
                del self._sites[key]
        return keys

    def look(self, keys: Keys) -> None:
        """Someone looks at the tests of these fits."""
        for key in keys:
            if key in self._sites:
                self._sites[key].looked_at = True
            elif _is_parameter(key):
                self.learned.looking.add(key[3])

    def returned(self, keys: Keys) -> None:
        """The function that is being read returns these."""
        name = self.context.within
        handed_on = frozenset(key for key in keys if not _is_parameter(key))
        self.learned.returns[name] = self.learned.returns.get(name, NOTHING) | handed_on

    def called(self, name: str, arguments: Keys) -> Keys:
        """A function of the file is called; returns what it returns."""
        context = self.context
        if context.simulated or (context.looped and name in self.before.drawing):
            return NOTHING
        self._calls[name].append((context.within, context.times))
        if name in self.before.declaring:
            self.declare(arguments, None)
        if name in self.before.looking:
            self.look(arguments)
        return self.before.returns.get(name, NOTHING)

    def mentioned(self, name: str, times: Times) -> None:
        """A function of the file is handed to something else, which calls it so often."""
        self._calls[name].append((self.context.within, self.context.times * times))

    def bind(self, name: str, keys: Keys, *, also: bool = False) -> None:
        """A name holds these from here on; with `also` beside what it held."""
        before = self.held(name)
        if also and len(before) > _MOST_HELD:
            self.declare(keys, None)
        elif before or keys:  # most names hold no result
            self._changed[-1].setdefault(name, before)
            self._holds[name] = before | keys if also else keys
            self.words.add(name)

    def held(self, name: str) -> Keys:
        """What a name holds here."""
        return self._holds.get(name, NOTHING)

    def tests(self) -> tuple[CalledTest, ...]:
        """The tests that were found, in the order of the text."""
        times: dict[str, Times] = {"": Times()}
        found = []
        for site in sorted(self._sites.values(), key=lambda one: one.key):
            if site.kind == "test" or (site.kind == "fit" and site.looked_at):
                made = self._times(site.context.within, times) * site.times
                test = None if site.context.chosen else site.test
                cell, line = site.key[0] or None, site.key[1]
                ids = tuple(dict.fromkeys(site.ids))
                found.append(CalledTest(site.name, test, line, cell, made.known, made.more, site.declared, ids))
        return tuple(found)

    def _times(self, function: str, worked_out: dict[str, Times]) -> Times:
        if function in worked_out:
            return worked_out[function]
        worked_out[function] = Times(0, more=True)  # where it calls itself
        calls = self._calls.get(function, [])
        total = Times(0, more=not calls)
        for within, times in calls:
            total += self._times(within, worked_out) * times
        if self.learned.defined[function] > 1:
            total = Times(min(total.known, 1), more=True)
        worked_out[function] = total
        return total


def _parameter(function: str) -> Key:
    return (-1, 0, 0, function)


def _is_parameter(key: Key) -> bool:
    return key[0] == -1
