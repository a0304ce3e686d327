"""Unknowns between `unknown` and `solve for`: who hangs on them, and where that is too early."""

from __future__ import annotations

from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import Faulty, FunctionDefinition, Solution, Statement, Unknown
from loadpath.resolve.parts import Use


class Unknowns:
    """Which unknowns are still open at the statement at hand, and which functions hang on them."""

    def __init__(self, statements: tuple[Statement, ...]) -> None:
        self.ever_solved = {s.name for s in statements if isinstance(s, Solution)}
        meant = (s for s in statements if isinstance(s, Faulty) and s.text.split()[:1] == ["solve"])
        self.ever_solved |= {name for statement in meant for name in statement.names}
        self.open: set[str] = set()
        self.closed: set[str] = set()
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

    def behind(self, uses: tuple[str, ...]) -> frozenset[str]:
        """The unknowns that uses of names come to, open or solved."""
        known = self.open | self.closed
        direct = frozenset(name for name in uses if name in known)
        return direct.union(*(self._behind.get(name, frozenset()) for name in uses))

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
        sought = frozenset(
            s.name for s in statement.together.sought
        ) if isinstance(statement, Solution) else frozenset()  # fmt: skip
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
