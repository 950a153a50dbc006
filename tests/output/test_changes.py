"""The comparison with the tables that stood there."""

import csv
import io

from rateloom.output.changes import changes_table

HEADER = "reaction,direction,temperature_K,rate_coefficient,unit,without_tunnelling,tunnelling_factor\r\n"


def table(*rows: str) -> bytes:
    return (HEADER + "".join(f"{row}\r\n" for row in rows)).encode()


def read(data: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(data.decode(), newline="")))


def test_nothing_has_changed_against_no_table_or_the_same_one() -> None:
    new = table("a,forward,300,1e-15,cm3 molecule-1 s-1,1e-16,10")

    assert read(changes_table(None, new)) == []
    assert read(changes_table(new, new)) == []


def test_a_changed_coefficient_is_listed_with_its_ratio() -> None:
    old = table("a,forward,300,1e-15,s-1,1e-16,10", "b,forward,300,5,s-1,5,1")
    new = table("a,forward,300,3e-15,s-1,3e-16,10", "b,forward,300,5,s-1,5,1")

    assert read(changes_table(old, new)) == [
        {
            "reaction": "a",
            "direction": "forward",
            "temperature_K": "300",
            "before": "1e-15",
            "after": "3e-15",
            "ratio": "3",
        }
    ]


def test_what_came_and_what_went_is_listed_without_a_ratio() -> None:
    rows = read(changes_table(table("gone,forward,300,1,s-1,1,1"), table("come,forward,300,2,s-1,2,1")))

    assert [(row["reaction"], row["before"], row["after"], row["ratio"]) for row in rows] == [
        ("come", "", "2", ""),
        ("gone", "1", "", ""),
    ]


def test_another_unit_is_a_change_without_a_ratio() -> None:
    rows = read(changes_table(table("a,forward,300,1,s-1,1,1"), table("a,forward,300,1,L mol-1 s-1,1,1")))

    assert [row["ratio"] for row in rows] == [""]
