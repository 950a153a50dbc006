"""What is out of date, why, in which order: decided without a worker or a file."""

import time
from collections.abc import Callable
from typing import Any

import networkx as nx
import pytest

from rateloom.engine import Node, Outcome, Reason, Schedule, Stage, Status, build_graph
from rateloom.engine.schedule import Past

STAGES = {
    "read": Stage("read", 1, Outcome, None, None, Outcome),
    "step": Stage("step", 1, Outcome, None, None),
}


def schedule(
    nodes: list[Node],
    known: Callable[[bytes], bytes | None] = lambda _: None,
    past: dict[str, Past] | None = None,
    **options: Any,
) -> Schedule:
    """A schedule whose files are as large as their names say and contain these."""
    return Schedule(
        build_graph(nodes),
        options.get("stages", STAGES),
        known=known,
        past=past or {},
        file_digest=options.get("digest", str.encode),
        file_size=lambda path: int(path),
    )


def drain(plan: Schedule) -> list[str]:
    """Carry all out, each result named after its node."""
    order = []
    while (node := plan.take()) is not None:
        order.append(node.name)
        plan.finish(node.name, node.name.encode())
    return order


def file(name: str, size: int) -> Node:
    return Node(name, "read", name.encode(), file=str(size))


def step(name: str, *inputs: str, parameters: bytes | None = None) -> Node:
    return Node(name, "step", name.encode() if parameters is None else parameters, inputs)


def test_the_longest_way_goes_first() -> None:
    nodes = [file("small", 10), file("large", 9_000), file("middle", 500), step("a", "small"), step("b", "a")]
    nodes += [step(f"c{i}", f"c{i - 1}" if i else "small") for i in range(12)]

    assert drain(schedule(nodes))[:2] == ["small", "c0"]  # 13 stages weigh more than one file of 9 kB


def test_large_files_are_read_before_small_ones_and_ties_go_by_name() -> None:
    nodes = [file("c", 10), file("b", 10), file("a", 5), file("d", 90)]

    assert drain(schedule(nodes)) == ["d", "b", "c", "a"]


def test_order_does_not_depend_on_the_order_of_the_nodes() -> None:
    nodes = [file(f"f{i}", i % 7) for i in range(30)] + [
        step(f"s{i}", f"f{i}", f"f{(i * 3) % 30}") for i in range(30)
    ]

    assert drain(schedule(nodes)) == drain(schedule(nodes[::-1]))


def test_of_equal_nodes_one_is_computed_and_the_others_share_it() -> None:
    nodes = [step("one", parameters=b""), step("two", parameters=b""), step("after", "one", "two")]
    plan = schedule(nodes)

    first = plan.take()
    assert first is not None
    assert plan.take() is None  # its twin waits for it
    assert plan.finish("one", b"result") == ["two"]

    assert plan.status["two"] is Status.REUSED
    assert plan.digests["two"] == b"result"
    assert drain(plan) == ["after"]


def test_a_faulty_node_makes_its_twins_faulty() -> None:
    plan = schedule([step("one", parameters=b""), step("two", parameters=b"")])
    plan.take()
    plan.take()

    plan.finish("one", b"none", faulty=True)

    assert plan.status == {"one": Status.FAULTY, "two": Status.FAULTY}
    assert plan.past_of("two").faulty


def test_a_node_given_back_sets_its_twins_free() -> None:
    plan = schedule([Node("one", "read", b"", file="1"), Node("two", "read", b"", file="1")])
    assert [plan.take(), plan.take()][1] is None

    plan.give_back("one")

    assert plan.ready == 2


def test_an_input_taken_twice_counts_once() -> None:
    assert drain(schedule([step("a"), step("b", "a", "a")])) == ["a", "b"]


def finished(nodes: list[Node], **options: Any) -> tuple[dict[str, Past], dict[bytes, bytes]]:
    """Carry all out and give what the next run knows of it."""
    plan = schedule(nodes, **options)
    drain(plan)
    return {n: plan.past_of(n) for n in plan.digests}, {plan.keys[n]: plan.digests[n] for n in plan.digests}


def test_nothing_changed_leaves_nothing_to_do() -> None:
    nodes = [file("f", 1), step("a", "f"), step("b", "a")]
    past, results = finished(nodes)

    plan = schedule(nodes, results.get, past)

    assert plan.take() is None
    assert set(plan.status.values()) == {Status.REUSED}
    assert plan.reasons == {}


@pytest.mark.parametrize(
    ("nodes", "options", "expected"),
    [
        ([file("f", 2), step("a", "f"), step("n")], {}, [Reason("f", "file changed"), Reason("n", "new")]),
        ([file("f", 1), step("a", "f", parameters=b"x")], {}, [Reason("a", "settings changed")]),
        ([file("f", 1), step("g"), step("a", "f", "g")], {}, [Reason("g", "new")]),
        (
            [file("f", 1), step("a", "f")],
            {"stages": STAGES | {"step": Stage("step", 2, Outcome, None, None)}},
            [Reason("a", "method changed")],
        ),
    ],
)
def test_every_reason_is_told(nodes: list[Node], options: dict[str, Any], expected: list[Reason]) -> None:
    past, results = finished([file("f", 1), step("a", "f")])

    assert sorted(schedule(nodes, results.get, past, **options).reasons.values(), key=lambda r: r.node) == expected


def test_a_changed_input_is_named() -> None:
    nodes = [file("f", 1), file("g", 1), step("a", "f", "g")]
    past, results = finished(nodes)
    plan = schedule([file("f", 1), file("g", 2), step("a", "f", "g")], results.get, past)

    plan.take()
    plan.finish("g", b"another result")

    assert plan.reasons["a"] == Reason("a", "input changed", ("g",))


def test_inputs_added_lost_results_and_former_faults_are_told() -> None:
    past, results = finished([step("a"), step("b", "a")])
    more = schedule([step("a"), step("c", parameters=b""), step("b", "a", "c")], results.get, past)
    drain(more)
    assert more.reasons["b"].why == "inputs added or removed"

    assert schedule([step("a")], past=past).reasons["a"].why == "result lost"

    faulty = {
        "a": Past(**{f: getattr(past["a"], f) for f in ("key", "version", "parameters", "inputs")}, faulty=True)
    }
    assert schedule([step("a")], past=faulty).reasons["a"].why == "failed before"


def test_a_file_that_could_not_be_read_before_is_told_from_one_that_changed() -> None:
    past, results = finished([file("f", 1)], digest=lambda _: b"unreadable: too slow")

    assert schedule([file("f", 1)], results.get, past).reasons["f"].why == "file not read before"


def test_fifty_thousand_nodes_are_scheduled_in_seconds() -> None:
    nodes = [file(f"f{i}", i) for i in range(10_000)]
    for layer in range(4):
        before = "f" if layer == 0 else f"s{layer - 1}."
        nodes += [
            step(f"s{layer}.{i}", f"{before}{i}", f"{before}{(7 * i) % 10_000}", f"{before}{(3 * i) % 10_000}")
            for i in range(10_000)
        ]
    graph: nx.DiGraph[str] = build_graph(nodes)
    begun = time.process_time()
    plan = Schedule(
        graph, STAGES, known=lambda _: None, past={}, file_digest=str.encode, file_size=lambda path: int(path)
    )

    order = drain(plan)

    # Small beside a run of so many nodes (minutes); in processor time, for the machine may be loaded.
    assert time.process_time() - begun < 3
    assert len(order) == 50_000
