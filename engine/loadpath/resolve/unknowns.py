"""Unknowns between `unknown` and `solve for`: who hangs on them, and where that is too early."""

from __future__ import annotations

from typing import TypeGuard

from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import Faulty, FunctionDefinition, Solution, Statement, Unknown
from loadpath.resolve.parts import Use


class Unknowns:
    """Which unknowns are still open at the statement at hand, and which functions hang on them."""

    def __init__(self, statements: tuple[Statement, ...]) -> None:
        self.ever_solved = {s.name for s in statements if isinstance(s, Solution)}
        self.ever_solved |= {name for s in statements if _is_meant(s) for name in s.names}
        self.open: set[str] = set()
        self.closed: set[str] = set()
        self.spoilt: dict[str, Faulty] = {}
        """Unknowns that a `solve for` which could not be read was meant to find."""
        self._behind: dict[str, frozenset[str]] = {}
        """For each function, the unknowns that stand somewhere in it."""

    def enter(self, statement: Statement, uses: tuple[str, ...]) -> None:
        """Takes up a statement that is through."""
        match statement:
            case Unknown(name=name):
                self.open.add(name)
            case FunctionDefinition(name=name):
                self._behind[name] = self.behind(uses)
            case Solution() if statement.is_last:
                for sought in statement.together.sought:
                    self.open.discard(sought.name)
                    self.closed.add(sought.name)
            case Faulty(names=names) if _is_meant(statement):
                self.spoilt |= {name: statement for name in names if name in self.open}

    def behind(self, uses: tuple[str, ...]) -> frozenset[str]:
        """The unknowns that uses of names come to, open or solved."""
        known = self.open | self.closed
        direct = frozenset(name for name in uses if name in known)
        return direct.union(*(self._behind.get(name, frozenset()) for name in uses))

    def spoilt_behind(self, statement: Statement, uses: tuple[str, ...]) -> Faulty | None:
        """The faulty `solve for` that spoils what a statement works with."""
        if isinstance(statement, FunctionDefinition | Unknown):
            return None
        missing = sorted(self.behind(uses) & set(self.spoilt) - _sought(statement))
        return self.spoilt[missing[0]] if missing else None

    def solved_behind(self, uses: tuple[str, ...]) -> tuple[str, ...]:
        """Solved unknowns that stand in the functions used: their solutions feed what evaluates these."""
        return tuple(sorted(name for name in self.behind(uses) if name in self.closed and name not in uses))

    def never_solved(self, statement: Statement) -> Mistake | None:
        """What is wrong with an unknown that no `solve for` finds."""
        if not isinstance(statement, Unknown) or statement.name in self.ever_solved:
            return None
        name = statement.name
        message = f"`{name}` is unknown, and no `solve for` on this sheet finds it"
        mend = f"solve for it below: `solve for {name}`, with an equation on a deeper line"
        return Mistake("unsolved-unknown", statement.name_span, message, mend)

    def too_early(self, statement: Statement, uses: list[Use]) -> Mistake | None:
        """What is wrong with a use that needs the value of an unknown before it is solved."""
        if isinstance(statement, FunctionDefinition | Unknown):
            return None
        sought = _sought(statement)
        for use in uses:
            missing = sorted((self.behind((use.name,)) & self.open & self.ever_solved) - sought)
            if missing:
                name = missing[0]
                what = f"`{use.name}` is still unknown here"
                if use.name != name:
                    what = f"`{use.name}` hangs on `{name}`, which is still unknown here"
                mend = f"move this line below the `solve for` that finds `{name}`"
                return Mistake("unsolved-unknown", use.span, what, mend)
        return None


def _sought(statement: Statement) -> frozenset[str]:
    """The unknowns that a `solve for` finds."""
    if not isinstance(statement, Solution):
        return frozenset()
    return frozenset(sought.name for sought in statement.together.sought)


def _is_meant(statement: Statement) -> TypeGuard[Faulty]:
    """True for what begins as a `solve for` and could not be read."""
    return isinstance(statement, Faulty) and statement.text.split()[:1] == ["solve"]
