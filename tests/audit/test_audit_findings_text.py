"""The table of codes, the paragraphs about them and the package's remarks name the same codes."""

import ast
import re
from importlib.resources import files
from pathlib import Path

import pytest

import rateloom
from rateloom.audit import CODES, LIMITS, SEVERITIES, Limits

TEXT = (files("rateloom.audit") / "FINDINGS.md").read_text(encoding="utf-8")
HEADING = re.compile(r"^### `([a-z-]+)` \((\w+)\)\n", re.MULTILINE)
CODE = re.compile(r"[a-z0-9]+(-[a-z0-9]+)+")
PACKAGE = Path(rateloom.__file__).parent


def paragraphs() -> dict[str, tuple[str, str]]:
    """Severity and text by code."""
    parts = HEADING.split(TEXT)[1:]
    return {
        code: (severity, re.split(r"^## ", text, flags=re.MULTILINE)[0].strip())
        for code, severity, text in zip(parts[::3], parts[1::3], parts[2::3], strict=True)
    }


def remarked() -> dict[str, str]:
    """Codes that stand as text in a call of Remark, with their file; a placeholder matches anything."""
    found = {}
    for path in sorted(PACKAGE.rglob("*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == "Remark":
                for code in _texts(next(iter(node.args), ast.Constant(value=None))):
                    found[code] = path.name
    return found


def _texts(node: ast.expr) -> list[str]:
    if isinstance(node, ast.Constant) and isinstance(node.value, str):
        return [re.escape(node.value)]
    if isinstance(node, ast.IfExp):
        return _texts(node.body) + _texts(node.orelse)
    if isinstance(node, ast.JoinedStr):
        return ["".join(re.escape(p.value) if isinstance(p, ast.Constant) else ".+" for p in node.values)]
    return []


def test_every_code_has_one_paragraph_and_every_paragraph_a_code() -> None:
    assert len(HEADING.findall(TEXT)) == TEXT.count("\n### ")
    assert sorted(code for code, _ in HEADING.findall(TEXT)) == sorted(CODES)


def test_the_paragraphs_name_the_severities() -> None:
    assert {code: severity for code, (severity, _) in paragraphs().items()} == dict(CODES)
    assert set(CODES.values()) == set(SEVERITIES)


@pytest.mark.parametrize("code", sorted(CODES))
def test_a_paragraph_says_how_much_it_matters_and_is_short(code: str) -> None:
    text = paragraphs()[code][1]

    assert CODE.fullmatch(code)
    assert 120 < len(text) < 800
    assert text.count(". ") + text.count(".\n") + text.count(": ") >= 2  # what it means, why it matters, what to do
    assert re.search(r"\d", text), "how large an error?"


def test_every_code_that_the_package_remarks_is_in_the_table() -> None:
    found = remarked()

    assert len(found) > 30
    strangers = {code: file for code, file in found.items() if not any(re.fullmatch(code, known) for known in CODES)}
    assert not strangers


def test_thresholds_named_in_the_text_exist() -> None:
    named = set(re.findall(r"\b[a-z]+(?:_[a-zA-Z0-9]+)+\b", TEXT))

    assert {name for name in named if name.endswith(("_per_cm", "_ratio", "_percent"))} <= set(LIMITS)


def test_every_threshold_has_a_unit_and_a_reason() -> None:
    units = ("per_cm", "angstrom", "hartree_per_bohr", "percent", "K", "ratio", "cm3_per_s", "per_s", "kJ_per_mol")
    source = (PACKAGE / "audit" / "limits.py").read_text(encoding="utf-8")

    for name, value in LIMITS.items():
        assert name.endswith(units), name
        assert value > 0
        assert re.search(rf'{name}: float = [^\n]*\n    """', source), f"{name} lacks its reason"


def test_a_job_file_sets_thresholds_by_name() -> None:
    limits = Limits.of({"soft_mode_per_cm": 80.0})

    assert limits.soft_mode_per_cm == 80.0
    assert limits.small_imaginary_per_cm == LIMITS["small_imaginary_per_cm"]
    with pytest.raises(TypeError, match="soft_modes_per_cm"):
        Limits.of({"soft_modes_per_cm": 80.0})
