"""What stands around every call: the limit of time, the size of input and result, the order of names."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from loadpath.algebra import failure
from loadpath.algebra.failure import NoForm, time_limit, too_large
from loadpath.algebra.terms import Terms, write
from loadpath.algebra.trees import decimals_in, size, without_spans
from loadpath.algebra.writing import Order, order_of, ordered
from loadpath.formula.tree import Name, Node, Quantity, walk

MOST_NODES = 2000
"""Of a derived expression."""
MOST_TYPED = 10_000


def framed(
    work: Callable[[], Terms],
    trees: tuple[Node, ...],
    *,
    last: str = "",
    in_place: tuple[Node, ...] = (),
    seconds: float | None = None,
    none: bool = False,
) -> Node | None:
    """The tree of what the work gives, written in the order of the trees typed.

    With `none`, None where it raises NoForm; `in_place` are trees that come in the place of the variable.
    """
    with bounds(trees, last=last, in_place=in_place, seconds=seconds):
        try:
            return finished(work())
        except NoForm:
            if none:
                return None
            raise


class bounds:
    """Limits and order for as long as one call takes; a tree too deep to be worked ends in AlgebraFailure.

    Numbers are fractions where `fractions` says so, else decimals where decimals were typed.
    """

    def __init__(
        self,
        trees: Iterable[Node],
        *,
        last: str = "",
        in_place: tuple[Node, ...] = (),
        seconds: float | None = None,
        fractions: bool = False,
    ) -> None:
        self._trees, self._fractions = tuple(trees), fractions
        self._limit = time_limit(failure.TIME_LIMIT if seconds is None else seconds)
        self._last, self._in_place = last, in_place

    def __enter__(self) -> None:
        if any(size(tree) > MOST_TYPED for tree in self._trees):
            raise too_large(f"an expression with more than {MOST_TYPED} parts")
        self._limit.__enter__()
        try:
            order = _order(self._trees, self._last, self._in_place)
            self._ordered = ordered(Order(order.ranks, order.decimals and not self._fractions))
        except RecursionError:
            self._limit.__exit__(None, None, None)
            raise too_large("an expression nested too deeply") from None
        self._ordered.__enter__()

    def __exit__(self, kind: type[BaseException] | None, *_: object) -> None:
        self._ordered.__exit__()
        self._limit.__exit__(None, None, None)
        if kind is not None and issubclass(kind, (RecursionError, OverflowError)):
            raise too_large("an expression nested too deeply, or with numbers too large")


def _order(trees: tuple[Node, ...], last: str, in_place: tuple[Node, ...]) -> Order:
    """Of the first tree for what it holds, then of the others; what comes for the variable takes its rank."""
    order = order_of(trees[:1] if in_place else trees, last, any(decimals_in(t) for t in trees))
    ranks = dict(order.ranks)
    place = ranks.get(Name(last), len(ranks))
    new = dict.fromkeys(n for tree in in_place for n in walk(tree) if isinstance(n, (Name, Quantity)))
    fresh = [n for n in new if n not in ranks]
    for node, rank in ranks.items():
        if rank > place:
            ranks[node] = rank + len(fresh)
    ranks.update({node: place + 1 + i for i, node in enumerate(fresh)})
    return Order(ranks, order.decimals)


def finished(terms: Terms) -> Node:
    """The tree without places; raises AlgebraFailure where it is too large."""
    node = write(terms)
    if size(node) > MOST_NODES:
        raise too_large(f"the derived expression has more than {MOST_NODES} parts")
    return without_spans(node)
