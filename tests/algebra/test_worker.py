"""The worker process: reused, stopped in time, ended with its parent; nothing hostile gets past the limit."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from algebra_trees import text, tree

from loadpath import algebra
from loadpath.algebra import door
from loadpath.algebra.trees import chain
from loadpath.formula.tree import Binary, Bracket, Call, Name, Negative, Node, Number, Relation

ENGINE = str(Path(algebra.__file__).parents[2])
TESTS = str(Path(__file__).parent)


def run(script: str, **environment: str) -> str:
    """What a fresh Python prints."""
    path = os.pathsep.join([ENGINE, TESTS])
    done = subprocess.run(
        [sys.executable, "-c", script], env={**os.environ, "PYTHONPATH": path, **environment},
        capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done.stdout


def is_alive(process: int) -> bool:
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    state = Path(f"/proc/{process}/stat")
    return not (state.exists() and state.read_text().rsplit(")", 1)[1].split()[0] == "Z")


def ends(process: int, seconds: float) -> bool:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if not is_alive(process):
            return True
        time.sleep(0.05)
    return False


HARD = "sin(x^5)^50"
"""What SymPy does not integrate in any time one would wait."""


def test_one_worker_serves_many_calls() -> None:
    algebra.limit(tree("sin(x)/x"), "x", Number("0"))
    first = door.worker_id()
    assert first is not None
    algebra.simplified(tree("sin(x)^2 + cos(x)^2"))
    assert door.worker_id() == first


def test_a_time_out_ends_the_worker_and_the_next_call_works() -> None:
    algebra.limit(tree("sin(x)/x"), "x", Number("0"))
    first = door.worker_id()
    started = time.monotonic()
    with pytest.raises(algebra.AlgebraFailure) as failure:
        algebra.antiderivative(tree(HARD), "x", seconds=1.5)
    assert failure.value.slug == "algebra-time-out"
    assert failure.value.help
    assert time.monotonic() - started < 3
    assert first is not None
    assert ends(first, 5)
    found = algebra.limit(tree("tan(x)/x"), "x", Number("0"))
    assert found is not None
    assert text(found) == "1"
    assert door.worker_id() not in (None, first)


def test_a_worker_that_died_is_replaced() -> None:
    algebra.limit(tree("sin(x)/x"), "x", Number("0"))
    first = door.worker_id()
    assert first is not None
    os.kill(first, 9)
    assert ends(first, 5)
    assert algebra.limit(tree("tan(x)/x"), "x", Number("0")) == Number("1")


def test_sympy_never_comes_into_this_process() -> None:
    script = """
import sys
from algebra_trees import tree
from loadpath import algebra
assert str(algebra.limit(tree("sin(x)/x"), "x", tree("0")).text) == "1"
algebra.definite(tree("x*sin(pi*x/L)"), "x", tree("0"), tree("L"))
print("sympy" in sys.modules, "mpmath" in sys.modules)
"""
    assert run(script).split() == ["False", "False"]


def test_nothing_starts_before_it_is_needed() -> None:
    script = """
from algebra_trees import text, tree
from loadpath import algebra
from loadpath.algebra import door
print(text(algebra.definite(tree("P*x*x/(E*I)"), "x", tree("0"), tree("L"))), door.worker_id())
"""
    assert run(script).strip() == "P*L^3/(3*E*I) None"


SEEDS = """
import yaml, sys
from test_expected_forms import FORMS, answer, printed
for form in FORMS:
    print(printed(answer(form)))
from algebra_trees import text, tree
from loadpath import algebra
for typed in ("x^2*<x - a>^1*sin(k*x)", "exp(-k*x)*cos(k*x)*(A + B*x)", "x^2/(a + b*x + x^2)", "1/(x^4 + a)"):
    found = algebra.antiderivative(tree(typed), "x")
    print(found and text(found))
for typed in ("(A + B + C)^3/(A + B)", "sigma*cos(t)^2 + tau*sin(2*t) + rho*sin(t)^2", "1/(1/k + 1/j + 1/i)"):
    print(text(algebra.simplified(tree(typed))))
"""


def test_the_same_trees_under_any_hash_seed() -> None:
    one, two = run(SEEDS, PYTHONHASHSEED="1"), run(SEEDS, PYTHONHASHSEED="4242")
    assert one == two
    assert len(one.splitlines()) > 60


def test_the_order_of_earlier_calls_does_not_matter() -> None:
    call = 'print(text(algebra.simplified(tree("(b + a)*(c + a)/(a*c + b*c) + sin(c)"))))'
    head = "from algebra_trees import text, tree\nfrom loadpath import algebra\n"
    other = 'algebra.simplified(tree("(c + a)*(c + b)*sin(b)/(b + a)"))\n'
    assert run(head + call) == run(head + other + call)


def test_the_worker_ends_with_its_parent() -> None:
    script = """
import os
from algebra_trees import tree
from loadpath import algebra
from loadpath.algebra import door
algebra.limit(tree("sin(x)/x"), "x", tree("0"))
print(door.worker_id(), flush=True)
os._exit(0)
"""
    assert ends(int(run(script)), 5)


def test_a_busy_worker_ends_with_its_parent() -> None:
    script = """
import os, threading, time
from algebra_trees import tree
from loadpath import algebra
from loadpath.algebra import door
algebra.limit(tree("sin(x)/x"), "x", tree("0"))
print(door.worker_id(), flush=True)
threading.Thread(target=algebra.antiderivative, args=(tree("sin(x^5)^50"), "x"), daemon=True).start()
time.sleep(0.5)
os._exit(0)
"""
    assert ends(int(run(script)), 5)


def test_a_strangers_files_in_the_folder_are_not_imported(tmp_path: Path) -> None:
    for name in ("sympy", "json", "loadpath"):
        (tmp_path / f"{name}.py").write_text("open('taken', 'w').close()")
    script = """
import os, sys
from algebra_trees import tree
from loadpath import algebra
os.chdir(sys.argv[1])
sys.path.insert(0, "")
print(algebra.limit(tree("sin(x)/x"), "x", tree("0")).text)
"""
    done = subprocess.run(
        [sys.executable, "-c", script, str(tmp_path)], capture_output=True, text=True, timeout=60,
        check=False, env={**os.environ, "PYTHONPATH": os.pathsep.join([ENGINE, TESTS])},
    )  # fmt: skip
    assert done.stdout.strip() == "1", done.stderr
    assert not (tmp_path / "taken").exists()


def test_the_worker_has_a_limit_on_memory() -> None:
    if sys.platform != "linux":
        pytest.skip("limits are read from /proc")
    algebra.limit(tree("sin(x)/x"), "x", Number("0"))
    limits = Path(f"/proc/{door.worker_id()}/limits").read_text()
    (line,) = (entry for entry in limits.splitlines() if entry.startswith("Max address space"))
    assert line.split()[3] == str(2 * 1024**3)


# --- hostile trees ------------------------------------------------------------------------------------------

x, L = Name("x"), Name("L")


def nested(depth: int, grow: Callable[[Node], Node], seed: Node = x) -> Node:
    node = seed
    for _ in range(depth):
        node = grow(node)
    return node


def wide(count: int) -> Node:
    node: Node = x
    for i in range(count):
        node = Binary("+", node, Binary("*", Name(f"a_{i}"), Binary("^", x, Number(str(i % 7)))))
    return node


def tower(*heights: str) -> Node:
    node: Node = Number(heights[-1])
    for height in reversed(heights[:-1]):
        node = Binary("^", Number(height), node)
    return node


def step(place: str) -> Bracket:
    return Bracket(Binary("-", x, Name(place)), 1)


HOSTILE: dict[str, Node] = {
    "minus upon minus": nested(5000, Negative),
    "sines of sines": nested(300, lambda n: Call("sin", (n,))),
    "roots of roots": nested(300, lambda n: Call("sqrt", (Binary("+", Number("1"), n),))),
    "fractions in fractions": nested(120, lambda n: Binary("/", Number("1"), Binary("+", L, n))),
    "a long sum": wide(1500),
    "a longer sum": wide(6000),
    "a power of a sum": Binary("^", Binary("+", Binary("+", x, L), Name("a")), Number("1000000")),
    "a high power": Binary("^", Binary("+", x, Binary("^", x, Number("2"))), Number("60")),
    "ten to a million": tower("10", "1000000"),
    "ten to a million, times x": Binary("*", tower("10", "1000000"), x),
    "a tower": Binary("*", tower("9", "9", "9", "9"), x),
    "a tower of decimals": Binary("*", tower("1.000001", "999999999", "9"), x),
    "x to a tower": Binary("^", x, tower("9", "9", "9")),
    "large typed numbers": nested(40, lambda n: Binary("*", n, Number("1e300"))),
    "products of sums": nested(30, lambda n: Binary("*", n, Binary("+", Binary("+", x, L), Name("q")))),
    "products of brackets": chain("*", [Binary("+", step(f"b_{i}"), step(f"c_{i}")) for i in range(9)]),
    "brackets below the line": Binary(
        "/", Number("1"), chain("+", [L, *[Bracket(Binary("-", x, Name(f"p_{i}")), 0) for i in range(14)]])
    ),
    "high brackets": Binary("^", Bracket(Binary("-", x, L), 99), Number("99")),
    "a wave of waves": Binary("^", Call("sin", (Binary("^", x, Number("5")),)), Number("50")),
}  # fmt: skip
WORKS: dict[str, Callable[[Node], object]] = {
    "antiderivative": lambda f: algebra.antiderivative(f, "x", seconds=2),
    "definite": lambda f: algebra.definite(f, "x", Number("0"), L, seconds=2),
    "derivative": lambda f: algebra.derivative(f, "x", seconds=2),
    "simplified": lambda f: algebra.simplified(f, seconds=2),
    "single_brackets": lambda f: algebra.single_brackets(f, "x", seconds=2),
    "limit": lambda f: algebra.limit(f, "x", Number("0"), seconds=2),
    "roots": lambda f: algebra.roots(Relation((f, L), ("=",)), "x", seconds=2),
    "solve_linear": lambda f: algebra.solve_linear((Relation((f, L), ("=",)),), ("x",), seconds=2),
}


@pytest.mark.parametrize("work", WORKS)
@pytest.mark.parametrize("what", HOSTILE)
def test_hostile_trees_end_in_time(what: str, work: str) -> None:
    started = time.monotonic()
    try:
        found = WORKS[work](HOSTILE[what])
    except algebra.AlgebraFailure as failure:
        assert failure.slug in ("algebra-time-out", "derived-too-large", "no-closed-form")
        assert failure.message
        assert failure.help
    else:
        assert found is None or isinstance(found, (Node, dict, tuple))
    assert time.monotonic() - started < 5


def test_after_all_that_the_worker_still_answers() -> None:
    assert algebra.limit(tree("sin(x)/x"), "x", Number("0")) == Number("1")


def test_an_interrupted_question_leaves_no_answer_for_the_next(monkeypatch: pytest.MonkeyPatch) -> None:
    """Ctrl-C while the worker works: its late answer belongs to nobody."""
    door.close()
    ask = door.Worker.ask

    def interrupted(self: door.Worker, request: bytes, seconds: float) -> bytes | None:
        if b'"ready"' in request:
            return ask(self, request, seconds)
        assert self.process.stdin is not None
        self.process.stdin.write(request)
        self.process.stdin.flush()
        raise KeyboardInterrupt

    with monkeypatch.context() as patch:
        patch.setattr(door.Worker, "ask", interrupted)
        with pytest.raises(KeyboardInterrupt):
            door.ask("limit")
    assert door.worker_id() is None
