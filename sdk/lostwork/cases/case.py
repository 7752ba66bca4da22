"""A case: a plant written down in a TOML file, to be audited under any backend."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from pathlib import Path
from types import MappingProxyType
from typing import Any

from lostwork.accounting.audit import Audit, Finding
from lostwork.accounting.balance import Balance
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.surroundings import Surroundings
from lostwork.cases.building import Built, Report, build, read_surroundings
from lostwork.cases.layout import Layout, read_layout
from lostwork.cases.problems import Problems
from lostwork.cases.text import read_text, tables
from lostwork.cases.wiring import Wiring, wire
from lostwork.errors import LostworkError, OutOfLimits, QuantityError
from lostwork.plugins import plugins
from lostwork.processes.contract import Process
from lostwork.properties.fluid import Fluid

__all__ = ["Case"]


class Case:
    """A plant as a case file describes it; it cannot be changed.

    Made by `read` or `parse`, which check tables, fields and references.  Fluids are opened and
    steps solved when they are first asked for, so that a case can be put under another backend
    where its own is not installed.
    """

    __slots__ = ("__dict__", "_backend", "_layout", "_wiring", "file", "surroundings")

    file: str
    """The path, or the name given, for messages."""
    surroundings: Surroundings
    """T0 and p0."""
    _layout: Layout
    _wiring: Wiring
    _backend: str | None

    def __init__(
        self,
        layout: Layout,
        wiring: Wiring,
        surroundings: Surroundings,
        *,
        file: str,
        backend: str | None = None,
    ) -> None:
        for name, value in (
            ("_layout", layout),
            ("_wiring", wiring),
            ("_backend", backend),
            ("surroundings", surroundings),
            ("file", file),
        ):
            object.__setattr__(self, name, value)

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Case cannot be changed: {name}")

    @classmethod
    def read(cls, path: str | Path) -> Case:
        """Read a case file.

        Raises
        ------
        CaseError
            The file cannot be read, or what it says is wrong; every problem with its table and
            field.
        """
        return cls.parse(read_text(path), name=str(path))

    @classmethod
    def parse(cls, text: str, *, name: str = "case") -> Case:
        """Read a case from a text; `name` stands for the file in messages.

        Raises
        ------
        CaseError
            What it says is wrong; every problem with its table and field.
        CircularReference
            Steps feed each other in a circle.
        """
        layout = read_layout(tables(text, name), name)
        wiring = wire(layout, name)
        return cls(layout, wiring, read_surroundings(layout, name), file=name)

    def with_backend(self, backend: str) -> Case:
        """Give the same case with every fluid behind another backend.

        A fluid that names an alternative in `instead_of` for this backend takes that one.

        Raises
        ------
        PluginNotFound, PluginClash
            No such backend is installed.
        """
        plugins().backend(backend)
        return Case(self._layout, self._wiring, self.surroundings, file=self.file, backend=backend)

    @property
    def title(self) -> str:
        """Title, or the name of the file."""
        return self._layout.case.title or Path(self.file).stem

    @property
    def note(self) -> str:
        """What the author wants the reader to know."""
        return self._layout.case.note

    @property
    def fluids(self) -> Mapping[str, Fluid]:
        """Fluids by name."""
        return MappingProxyType(dict(self._built.fluids))

    @property
    def streams(self) -> Mapping[str, Stream]:
        """The streams the case states, by name."""
        return MappingProxyType(dict(self._built.streams))

    @property
    def charges(self) -> Mapping[str, Content]:
        """The charges the case states, by name."""
        return MappingProxyType(dict(self._built.charges))

    @property
    def steps(self) -> Mapping[str, Process]:
        """Solved steps by name, in the order of the file."""
        built = self._built.steps
        return MappingProxyType({name: built[name] for name in self._layout.steps})

    @property
    def step_names(self) -> tuple[str, ...]:
        """Names of the steps in the order of the file; nothing is solved."""
        return tuple(self._layout.steps)

    def audit(self, progress: Report | None = None) -> Audit:
        """Solve every step and draw the balances, of each and around all.

        Parameters
        ----------
        progress
            Called with how many parts are done, how many there are, and what comes next.

        Raises
        ------
        CaseError
            Fluids, states or steps cannot be made as described.
        InternalDisagreement
            Two routes to one figure disagree: a defect, not a mistake in the case.
        """
        if "_built" not in self.__dict__:
            self.__dict__["_built"] = self._build(progress)
        balances = self._balances()
        problems = Problems(self.file)
        try:
            return Audit(
                balances,
                agreement=self._layout.case.agreement,
                joined=self._built.joined,
                remarks=self._remarks(),
            )
        except (QuantityError, OutOfLimits) as error:
            problems.wrap("case", error, fields=("agreement",))
            raise problems.error() from error
        except LostworkError as error:
            problems.wrap("steps", error)
            raise problems.error() from error

    def _balances(self) -> list[Balance]:
        problems = Problems(self.file)
        balances: list[Balance] = []
        for name, step in self.steps.items():
            try:
                balance = step.balance(self.surroundings)
                _ = balance.verdict
            except LostworkError as error:
                problems.wrap(f"steps.{name}", error)
            else:
                balances.append(balance)
        problems.require_none()
        return balances

    @cached_property
    def _built(self) -> Built:
        return self._build(None)

    def _build(self, progress: Report | None) -> Built:
        return build(
            self._layout,
            self._wiring,
            self.surroundings,
            file=self.file,
            backend=self._backend,
            report=progress,
        )

    def _remarks(self) -> list[Finding]:
        unused = [
            Finding(step="", check="case", text=f"{name!r} is stated and enters no step")
            for name in self._wiring.unused
        ]
        return unused + self._notes()

    def _notes(self) -> list[Finding]:
        """What the backends say of their fluids, each remark once for all it concerns."""
        concerned: dict[str, list[str]] = {}
        for name, fluid in self._built.fluids.items():
            for note in fluid.notes:
                concerned.setdefault(note, []).append(name)
        return [
            Finding(step="", check=f"fluid {', '.join(names)}", text=note)
            for note, names in concerned.items()
        ]

    def __repr__(self) -> str:
        backend = f", backend={self._backend!r}" if self._backend else ""
        return f"Case({self.file!r}{backend}: {len(self._layout.steps)} steps)"

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored, (
            self._layout,
            self._wiring,
            self.surroundings,
            self.file,
            self._backend,
        )


def _restored(
    layout: Layout, wiring: Wiring, surroundings: Surroundings, file: str, backend: str | None
) -> Case:
    return Case(layout, wiring, surroundings, file=file, backend=backend)
