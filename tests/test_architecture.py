"""Import arrows between the packages, sizes of files and functions, and what the SQL must say of itself.

The arrows are read from the syntax tree. `command` is the wiring layer: one file a verb, it may import everything but
`cli`, and nothing but `cli` and itself may import it.
"""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import duckdb
import pytest

from outcomes.intake.vocabulary import vocabulary
from outcomes.resources import shipped, sql_files
from outcomes.store.schema import NUMBERED, NUMBERED_WITHIN, create_store, record_columns

PACKAGE = Path(__file__).parents[1] / "outcomes"
SYNTHETIC = PACKAGE.parent / "synthetic_cohort"
COMMON = {"errors", "findings", "terms", "resources", "__init__"}
# Package -> our packages that it may import, besides COMMON and itself.
ARROWS: dict[str, set[str]] = {
    "intake": set(),
    "store": {"intake"},
    "cohort": {"store"},
    "criteria": set(),
    "scores": set(),
    "analysis": set(),
    "study": {"cohort", "criteria", "scores", "analysis", "tables"},
    "protect": {"analysis"},
    "figures": {"analysis", "tables"},
    "tables": {"analysis"},
    "report": {"intake", "cohort", "criteria", "scores", "analysis", "study", "protect", "figures", "tables"},
    "command": {"intake", "store", "cohort", "criteria", "scores", "analysis", "study", "protect", "figures", "tables", "report"},
}
# Package -> libraries that it must not import.
BANNED: dict[str, set[str]] = {
    "intake": {"matplotlib", "jinja2", "lifelines", "sklearn", "seaborn"},
    "store": {"matplotlib", "jinja2", "lifelines", "sklearn", "seaborn"},
    "cohort": {"matplotlib", "jinja2", "seaborn"},
    "criteria": {"duckdb", "matplotlib", "seaborn"},
    "scores": {"duckdb", "matplotlib", "pathlib", "seaborn"},
    "analysis": {"duckdb", "matplotlib", "seaborn", "jinja2", "pathlib", "io", "logging", "time"},
    "study": {"duckdb", "matplotlib", "jinja2", "seaborn"},
    "protect": {"duckdb", "matplotlib", "seaborn"},
    "figures": {"duckdb", "lifelines", "sklearn", "scipy"},
    "tables": {"duckdb", "lifelines", "sklearn", "scipy"},
    "report": {"duckdb"},
}
NO_CLOCK_BELOW = ("intake", "cohort", "criteria", "scores", "analysis", "study", "protect", "figures", "tables", "report")
MODULES = sorted(p for p in PACKAGE.rglob("*.py") if "_shipped" not in p.parts)
SOURCES = [*MODULES, *sorted(SYNTHETIC.rglob("*.py"))]
MAX_LINES = 300
MAX_BODY = 45


def layer(path: Path) -> str:
    """First part of the path inside the package, without the ending."""
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imports(tree: ast.AST) -> Iterator[tuple[str, int]]:
    """(dotted name, line) of everything imported anywhere in the tree; `from a import b` gives a.b."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((alias.name, node.lineno) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"relative import in line {node.lineno}"
            yield from ((f"{node.module}.{alias.name}", node.lineno) for alias in node.names)


def tree_of(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_imports_point_one_way_and_shun_what_the_package_must_not_know(path: Path) -> None:
    here = layer(path)
    if here in ("cli", "__main__"):
        return
    allowed = COMMON | {here} | ARROWS.get(here, set())
    wrong = []
    for name, line in imports(tree_of(path)):
        parts = name.split(".")
        if parts[0] == "outcomes" and len(parts) > 1 and parts[1] != "__version__" and parts[1] not in allowed:
            wrong.append(f"line {line}: {name}")
        if parts[0] in BANNED.get(here, set()):
            wrong.append(f"line {line}: {name}")
    assert wrong == []


def test_the_table_of_arrows_has_no_cycle_and_names_every_package() -> None:
    packages = {p.name for p in PACKAGE.iterdir() if (p / "__init__.py").exists() and p.name != "_shipped"}
    assert packages == set(ARROWS)
    done: set[str] = set()
    while open_ones := {name for name, needs in ARROWS.items() if name not in done and needs <= done}:
        done |= open_ones
    assert done == set(ARROWS)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_nothing_is_imported_inside_a_function(path: Path) -> None:
    if path.relative_to(PACKAGE).as_posix() in ("cli.py", "__init__.py"):
        return
    inside = [
        node.lineno
        for function in ast.walk(tree_of(path))
        if isinstance(function, (ast.FunctionDef, ast.AsyncFunctionDef))
        for node in ast.walk(function)
        if isinstance(node, (ast.Import, ast.ImportFrom))
    ]
    assert inside == []


@pytest.mark.parametrize("path", [p for p in MODULES if layer(p) in NO_CLOCK_BELOW], ids=lambda p: str(p.relative_to(PACKAGE)))
def test_no_clock_and_no_global_randomness(path: Path) -> None:
    wrong = [
        f"line {node.lineno}: {node.func.value.id}.{node.func.attr}"
        for node in ast.walk(tree_of(path))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute) and isinstance(node.func.value, ast.Name)
        and (node.func.attr in ("now", "today", "utcnow") or (node.func.value.id == "random" and node.func.attr != "Random")
             or (node.func.value.id == "time" and node.func.attr in ("time", "monotonic")))
    ]  # fmt: skip
    assert wrong == []


def test_synthetic_cohort_does_not_know_the_product() -> None:
    for path in SYNTHETIC.rglob("*.py"):
        roots = {name.split(".")[0] for name, _ in imports(tree_of(path))}
        assert roots - set(sys.stdlib_module_names) <= {"numpy", "pandas", "openpyxl", "synthetic_cohort"}, path


@pytest.mark.parametrize("path", SOURCES, ids=lambda p: "/".join(p.parts[-2:]))
def test_a_file_has_one_subject_and_its_functions_are_short(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert text.count("\n") < MAX_LINES
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef)):
            body = node.body[1:] if ast.get_docstring(node) else node.body
            length = (node.end_lineno or 0) - body[0].lineno + 1 if body else 0
            assert length <= MAX_BODY, f"{node.name}: {length} lines"


def test_import_outcomes_loads_no_heavy_library() -> None:
    heavy = "[m for m in ('matplotlib', 'duckdb', 'lifelines', 'pandas', 'sklearn') if m in sys.modules]"
    done = subprocess.run(
        [sys.executable, "-c", f"import sys, outcomes; sys.exit(len({heavy}))"], cwd=PACKAGE.parent, check=False, timeout=60
    )
    assert done.returncode == 0


def test_every_target_of_a_field_is_a_column_of_the_record() -> None:
    # The start is hour 0 itself and is never stored; a scale of a neurological outcome is a row, not a column.
    special = {("support_run", "start"), ("neuro_outcome", "cpc"), ("neuro_outcome", "mrs")}
    columns = {(table, column) for table, listed in record_columns().items() for column, _ in listed}
    by_word = {"measurement", "vasoactive_dose", "complication_event"}
    missing = [
        f.name for f in vocabulary().fields.values()
        if (f.table, f.column) not in columns | special and not (f.table in by_word and f.table in record_columns())
    ]  # fmt: skip
    assert missing == []


def test_every_record_table_and_column_has_a_comment() -> None:
    con = duckdb.connect(":memory:")
    create_store(con)
    bare = con.execute(
        """select table_name || '.' || column_name from duckdb_columns() where schema_name = 'record' and coalesce(comment, '') = ''
        union all select table_name from duckdb_tables() where schema_name = 'record' and coalesce(comment, '') = ''"""
    ).fetchall()
    con.close()
    assert bare == []


def test_closed_lists_fit_together() -> None:
    words = vocabulary()
    coded = [f for f in words.fields.values() if f.kind == "code"]
    assert [f.name for f in coded if f.list_name not in words.lists] == []
    counted = [f for f in words.fields.values() if f.kind in ("number", "integer", "duration", "scale") and f.quantity != "count"]
    quantities = {q for q, _ in words.conversions}
    assert [f.name for f in counted if f.quantity not in quantities] == []
    assert {f.effect for f in words.fields.values()} <= {"run", "row", "cell"}
    assert set(NUMBERED) <= set(record_columns()) and set(NUMBERED_WITHIN) <= set(NUMBERED)
    for table, column in NUMBERED.items():
        assert column in dict(record_columns()[table])


def test_limits_enclose_each_other_and_hold_the_canonical_unit() -> None:
    con = duckdb.connect(":memory:")
    create_store(con)
    wrong = con.execute(
        """select analyte from vocabulary.analyte where not (hard_low <= plausible_low and plausible_low < plausible_high and plausible_high <= hard_high)
        union all select a.analyte from vocabulary.analyte a
        where not exists (select 1 from vocabulary.unit_conversion u where u.quantity = a.quantity and u.received_unit = a.unit and u.factor = 1 and u.shift = 0)
        union all select field from vocabulary.typical_median where low >= high
        union all select quantity || ' ' || received_unit from vocabulary.unit_conversion group by all having count(*) > 1"""
    ).fetchall()
    con.close()
    assert wrong == []


def test_every_sql_file_is_one_statement_with_a_header() -> None:
    for topic in sorted(p.name for p in shipped("sql").iterdir() if p.is_dir()):
        for stem, text in sql_files(topic):
            assert text.startswith("-- "), f"{topic}/{stem}"
            assert text.count("\n") < MAX_LINES
            if topic != "record":
                code = "\n".join(line.split("--")[0] for line in text.splitlines() if "'" not in line)
                assert ";" not in code, f"{topic}/{stem}"
