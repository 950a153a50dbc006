"""Nodes make a graph without circles; a task gives a value or says why there is none."""

import subprocess
import sys
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest

from rateloom.engine import Fingerprints, Node, Task, build_graph, encode, run_task
from rateloom.engine.stage import Done, Undone, key_of

if TYPE_CHECKING:
    from toy_job import Toy


def step(name: str, *inputs: str) -> Node:
    return Node(name, "step", name.encode(), inputs)


def test_the_order_of_a_graph_has_inputs_first() -> None:
    graph = build_graph([step("c", "b", "a"), step("b", "a", "a"), step("a"), step("d")])

    order = graph.graph["order"]

    assert sorted(order) == ["a", "b", "c", "d"]
    assert order.index("a") < order.index("b") < order.index("c")
    assert sorted(graph.edges) == [("a", "b"), ("a", "c"), ("b", "c")]


@pytest.mark.parametrize(
    ("nodes", "message"),
    [
        ([step("a"), step("a")], "two nodes are called 'a'"),
        ([step("a", "b")], "node 'a' takes 'b', which is not a node"),
        ([step("a", "b"), step("b", "a"), step("c")], "the nodes form a circle"),
        ([step("a", "a")], "the nodes form a circle"),
    ],
)
def test_duplicate_names_unknown_inputs_and_circles_are_refused(nodes: list[Node], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        build_graph(nodes)


def test_a_key_depends_on_all_that_the_result_depends_on() -> None:
    node = Node("n", "read", b"p", file="/a/x.out")
    keys = [
        key_of(node, 1, [b"i"]),
        key_of(replace(node, stage="other"), 1, [b"i"]),
        key_of(node, 2, [b"i"]),
        key_of(replace(node, parameters=b"q"), 1, [b"i"]),
        key_of(node, 1, [b"j"]),
        key_of(node, 1, [b"i", b"i"]),
        key_of(replace(node, file="/a/x.out.gz"), 1, [b"i"]),
    ]

    assert len(set(keys)) == len(keys)
    assert key_of(replace(node, name="m", file="/b/x.out"), 1, [b"i"]) == keys[0]


def test_a_task_refuses_a_file_that_is_not_the_one_its_key_was_made_of(toy: "Toy") -> None:
    path = toy.write("a.txt", "1")
    digest = Fingerprints({})[str(path)].sha256
    task = Task("a", "read", encode({"by": 0.0, "mode": ""}), file=str(path), file_digest=digest)

    assert isinstance(run_task(task, toy.stages), Done)
    assert run_task(replace(task, file_data=b"2"), toy.stages) == Undone("a", "file-changed")
    gone = run_task(replace(task, file=f"{path}.gone"), toy.stages)
    assert gone == Undone("a", "file-not-visible", "No such file or directory")
    assert isinstance(run_task(replace(task, file=f"{path}.gone", file_data=b"1"), toy.stages), Done)


def test_an_unknown_stage_or_parameters_of_another_form_are_faults(toy: "Toy") -> None:
    unknown = run_task(Task("a", "no stage", b""), toy.stages)
    other = run_task(Task("a", "add", encode({"by": "much"})), toy.stages)

    assert isinstance(unknown, Undone)
    assert unknown.detail.startswith("KeyError: 'no stage' at stage.py:")
    assert isinstance(other, Undone)
    assert other.detail.startswith("ValidationError: Expected `float`, got `str`")


def test_the_engine_loads_no_heavy_library_before_it_is_needed() -> None:
    heavy = "{'networkx', 'numpy', 'scipy', 'distributed', 'joblib', 'threadpoolctl'}"
    code = f"import sys, rateloom.engine; print(sorted({heavy} & set(sys.modules)))"

    result = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)

    assert result.stdout.strip() == "[]"
