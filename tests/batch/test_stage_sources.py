"""No stage changes what it does while its version stands still."""

import importlib.util
import textwrap
from pathlib import Path
from types import ModuleType

import pytest

HERE = Path(__file__).resolve().parent


def load_helper() -> ModuleType:
    """Load the helper, which is not a test module."""
    spec = importlib.util.spec_from_file_location("stage_sources", HERE / "stage_sources.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


helper = load_helper()


def test_no_stage_changed_while_its_version_stood_still() -> None:
    stages = helper.table("rateloom.batch.stages:STAGES")
    sources = helper.Sources(HERE.parents[1] / "pipeline", "rateloom", left_out=("rateloom.engine",))

    faults = helper.differences(helper.load(HERE / "stage_sources.json"), helper.describe(stages, sources))

    assert not faults, "\n".join(faults)


# The helper itself


@pytest.fixture
def package(tmp_path: Path) -> Path:
    """A package: a stage that uses one function of a room with two modules."""
    write(tmp_path, "shop/__init__.py", "")
    write(tmp_path, "shop/stage.py", "from shop.room import used\n\ndef compute(x):\n    return used(x) + 1\n")
    write(tmp_path, "shop/room/__init__.py", "from shop.room.one import used\nfrom .two import unused\n")
    write(
        tmp_path, "shop/room/one.py", "from shop.engine import tool\nfrom .three import deep\ndef used(x): return x\n"
    )
    write(tmp_path, "shop/room/two.py", "def unused(x): return x\n")
    write(tmp_path, "shop/room/three.py", "import math\ndeep = 1\n")
    write(tmp_path, "shop/engine.py", "tool = 1\n")
    return tmp_path


def write(root: Path, name: str, text: str) -> None:
    (root / name).parent.mkdir(parents=True, exist_ok=True)
    (root / name).write_text(textwrap.dedent(text), encoding="utf-8")


def source_hash(root: Path) -> str:
    return helper.Sources(root, "shop", left_out=("shop.engine",)).hash_of({"shop.stage"})


def test_only_the_modules_that_names_come_from_are_followed(package: Path) -> None:
    closure = helper.Sources(package, "shop", left_out=("shop.engine",)).closure({"shop.stage"})

    assert closure == {"shop.stage", "shop.room.one", "shop.room.three"}


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("shop/stage.py", "from shop.room import used\n\ndef compute(x):\n    return used(x) + 2\n"),
        ("shop/room/three.py", "import math\ndeep = 1.0\n"),
        ("shop/room/one.py", "from shop.engine import tool\nfrom .three import deep\ndef used(x): return +x\n"),
        ("shop/room/levels.yaml", "OH: 139.2\n"),
    ],
)
def test_a_change_of_what_is_done_is_noticed(package: Path, name: str, text: str) -> None:
    before = source_hash(package)

    write(package, name, text)

    assert source_hash(package) != before


@pytest.mark.parametrize(
    ("name", "text"),
    [
        (
            "shop/stage.py",
            'from shop.room import used\n# why\ndef compute(x):\n  """Add."""\n  return (used( x )+1)\n',
        ),
        ("shop/room/two.py", "def unused(x): return 2 * x\n"),
        ("shop/engine.py", "tool = 2\n"),
    ],
)
def test_layout_comments_and_what_is_not_used_are_of_no_account(package: Path, name: str, text: str) -> None:
    before = source_hash(package)

    write(package, name, text)

    assert source_hash(package) == before


def test_each_difference_is_told_with_what_to_do() -> None:
    recorded = {n: {"version": 2, "source": "a"} for n in ("same", "changed", "raised", "lowered", "gone")}
    now = {
        "same": {"version": 2, "source": "a"},
        "changed": {"version": 2, "source": "b"},
        "raised": {"version": 3, "source": "b"},
        "lowered": {"version": 1, "source": "a"},
        "new": {"version": 1, "source": "a"},
    }

    assert helper.differences(recorded, now) == [
        "stage changed changed: raise its version, or record the sources again with "
        "`python tests/batch/record_stage_sources.py` if the results cannot differ",
        "stage gone is gone: record the sources again",
        "stage lowered went back from version 2: results of both would be mixed up",
        "stage new is new: record the sources again",
        "stage raised has a new version: record the sources again",
    ]
