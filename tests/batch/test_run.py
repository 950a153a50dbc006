"""A batch on real outputs: nothing twice, nothing silent, nothing lost."""

import csv
import gzip
import json
import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.batch import Summary, plan_job, run_job

Quiet = Callable[[int, int, str], None]
TABLES = ("rates.csv", "arrhenius.csv", "species.csv", "equilibrium.csv", "audit.csv", "changes.csv")


@pytest.fixture
def run(job: Path, quiet: Quiet) -> Callable[..., Summary]:
    """Run the small job in this process."""

    def once(workers: int = 1) -> Summary:
        return run_job(str(job), workers=workers, progress=quiet)

    return once


def rows(job: Path, table: str) -> list[dict[str, str]]:
    with (job.parent / "tables" / table).open(newline="") as file:
        return list(csv.DictReader(file))


def contents(job: Path) -> dict[str, bytes]:
    return {name: (job.parent / "tables" / name).read_bytes() for name in TABLES}


def edit(path: Path, change: Callable[[str], str]) -> None:
    """Change a compressed output in place."""
    path.write_bytes(gzip.compress(change(gzip.decompress(path.read_bytes()).decode()).encode()))


def other_energy(text: str) -> str:
    """Raise a coupled-cluster energy by 1 millihartree, as a recalculation might."""
    lines = text.splitlines(keepends=True)
    return "".join(_shifted(line) if "CCSD(T) total energy" in line else line for line in lines)


def _shifted(line: str) -> str:
    number = line.split()[-1]
    return line.replace(number, f"{float(number) + 1e-3:.15f}")


def test_every_reaction_has_its_rows_in_the_order_of_the_job_file(job: Path, run: Callable[..., Summary]) -> None:
    summary = run()

    assert summary.delivered == 2
    assert summary.exit_status == 0
    assert list(dict.fromkeys(row["reaction"] for row in rows(job, "rates.csv"))) == ["h2-h", "ch4-h"]
    assert len(rows(job, "rates.csv")) == 2 * 2 * 8
    assert len(rows(job, "species.csv")) == 4 * 8


def test_reverse_is_forward_over_the_equilibrium_constant(job: Path, run: Callable[..., Summary]) -> None:
    run()

    k = {
        (r["reaction"], r["direction"], r["temperature_K"]): float(r["rate_coefficient"])
        for r in rows(job, "rates.csv")
    }
    for row in rows(job, "equilibrium.csv"):
        key = row["reaction"], row["temperature_K"]
        # Ten digits are written of each of the three numbers.
        assert k[key[0], "forward", key[1]] / k[key[0], "reverse", key[1]] == pytest.approx(
            float(row["K_c"]), rel=3e-9
        )


def test_a_second_run_computes_nothing_and_leaves_the_bytes(job: Path, run: Callable[..., Summary]) -> None:
    run()
    before = contents(job)

    summary = run()

    assert sum(summary.computed.values()) == 0
    assert contents(job) == before
    stages = json.loads((job.parent / "tables" / "run.json").read_text())["stages"]
    assert all(counts["computed"] == 0 for counts in stages.values())


def test_two_workers_give_the_bytes_of_one(job: Path, run: Callable[..., Summary]) -> None:
    run()
    one = contents(job)
    shutil.rmtree(job.parent / "tables")

    run(workers=2)

    assert contents(job) == one


def test_one_species_recalculated_wakes_its_dependants_alone(job: Path, run: Callable[..., Summary]) -> None:
    run()
    edit(job.parent / "calculations" / "ch4_ccsdt.out.gz", other_energy)
    plan = plan_job(str(job))

    summary = run()

    assert [reason.node for reason in plan.certain] == ["read calculations/ch4_ccsdt.out.gz"]
    assert "rate ch4-h" in plan.possible
    assert not [name for name in plan.possible if "h2-h" in name]
    assert set(summary.renewed) <= {plan.certain[0].node, *plan.possible}
    assert "rate ch4-h" in summary.renewed
    changed = {row["reaction"] for row in rows(job, "changes.csv")}
    assert changed == {"ch4-h"}
    # Forward, the barrier is lower by 1 millihartree, 315.8 K in units of k.
    first = next(row for row in rows(job, "changes.csv") if row["direction"] == "forward")
    assert float(first["ratio"]) > 1.0


def test_a_file_that_says_the_same_wakes_nothing_after_it(job: Path, run: Callable[..., Summary]) -> None:
    run()
    path = job.parent / "calculations" / "ch4.out.gz"
    path.write_bytes(gzip.compress(gzip.decompress(path.read_bytes()), compresslevel=1))

    summary = run()

    assert summary.renewed == ("read calculations/ch4.out.gz",)


@pytest.mark.parametrize(
    ("damage", "code"),
    [
        pytest.param(lambda path: path.unlink(), "calculation-not-readable", id="missing"),
        pytest.param(lambda path: path.write_bytes(b""), "calculation-not-readable", id="empty"),
        pytest.param(lambda path: path.write_bytes(bytes(range(256)) * 9), "calculation-not-readable", id="binary"),
        pytest.param(lambda path: path.write_text("Dear diary,\n" * 99), "calculation-not-readable", id="foreign"),
        pytest.param(
            lambda path: edit(path, lambda text: text[: len(text) * 9 // 10]), "unfinished-calculation", id="cut"
        ),
        pytest.param(
            lambda path: path.write_bytes(path.read_bytes()[:-2000]), "calculation-not-readable", id="cut gzip"
        ),
    ],
)
def test_a_bad_file_withholds_its_reactions_and_no_others(
    job: Path, run: Callable[..., Summary], damage: Callable[[Path], object], code: str
) -> None:
    damage(job.parent / "calculations" / "ts_ch4_h.out.gz")

    summary = run()

    assert summary.exit_status == 1
    assert list(summary.withheld) == ["ch4-h"]
    assert any(code in reason for reason in summary.withheld["ch4-h"])
    assert {row["reaction"] for row in rows(job, "rates.csv")} == {"h2-h"}
    findings = [row for row in rows(job, "audit.csv") if row["finding"] == code]
    assert any(row["message"].startswith("calculations/ts_ch4_h.out.gz: ") for row in findings)


def test_an_accepted_error_is_delivered_and_stays_visible(job: Path, run: Callable[..., Summary]) -> None:
    text = job.read_text()
    job.write_text(text.replace("CH4: {", "CH4: {multiplicity: 3, "))
    assert set(run().withheld) == {"ch4-h"}
    codes = {row["finding"] for row in rows(job, "audit.csv") if row["severity"] == "error"}
    accept = ", ".join(f"{code}: a test of acceptance" for code in sorted(codes))

    job.write_text(
        job.read_text()
        .replace("CH4: {", f"CH4: {{accept: {{{accept}}}, ")
        .replace("transition_state: ts-ch4-h}", f"transition_state: ts-ch4-h, accept: {{{accept}}}}}")
    )
    summary = run()

    assert summary.exit_status == 0
    accepted = [row for row in rows(job, "audit.csv") if row["accepted_because"]]
    assert {row["finding"] for row in accepted} == codes


def test_an_accept_that_matches_nothing_is_reported(job: Path, run: Callable[..., Summary]) -> None:
    job.write_text(job.read_text().replace("CH4: {", "CH4: {accept: {no-energy: none}, "))

    run()

    found = [row for row in rows(job, "audit.csv") if row["finding"] == "accept-matches-nothing"]
    assert [(row["subject"], row["value"]) for row in found] == [("CH4", "no-energy")]


def test_an_interrupted_run_goes_on_where_it_stopped(job: Path, run: Callable[..., Summary]) -> None:
    def interrupt(done: int, _total: int, _last: str) -> None:
        if done == 5:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        run_job(str(job), workers=1, progress=interrupt)

    summary = run()

    assert summary.reused["read"] >= 4
    assert summary.delivered == 2
