"""The [[file]] of a draft: its form, its tables, and what holds for all of its columns."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

from outcomes.intake.draft_blank import blank_groups
from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_proposal import Proposal
from outcomes.intake.draft_role import DraftSheet, list_key
from outcomes.intake.draft_sheet import is_windowed, kept
from outcomes.intake.draft_text import column_lines, comment, entry
from outcomes.intake.reading.outline import SheetOutline
from outcomes.intake.vocabulary import vocabulary


def file_lines(key: str, outlines: Sequence[SheetOutline], sheets: Sequence[DraftSheet]) -> list[str]:
    """One file with all of its tables; a table that cannot be read is named and left out."""
    first = outlines[0]
    lines = [
        "",
        *comment(
            f"Files are given to the import in the order of these blocks. Kind by the {first.evidence['kind']}."
        ),
        "[[file]]",
        f'key = "{key}"',
    ]
    lines += entry("kind", first.spec.kind)
    if first.spec.kind == "csv":
        lines += [
            *comment(_sure(first, "encoding")),
            *entry("encoding", "utf-16" if first.spec.encoding.startswith("utf-16") else first.spec.encoding),
        ]
        lines += [*comment(_sure(first, "separator")), *entry("separator", first.spec.separator)]
    columns = [made for sheet in sheets for made in kept(sheet)]
    lines += [*_decimal_mark(columns), *_pattern(columns), *_missing(columns)]
    for outline in outlines:
        sheet = next((s for s in sheets if s.outline is outline), None)
        if sheet is None:
            refusal = outline.refusal
            why = f"cannot be read as a table ({refusal.code})" if refusal else "holds no rows"
            lines += ["", *comment(f"Sheet {outline.position} is left out: it {why}.")]
        else:
            lines += _list_lines(sheet) if sheet.is_list else _sheet_lines(sheet, explain=sheet is sheets[0])
    return lines


def _sure(outline: SheetOutline, key: str) -> str:
    return f"{'guessed' if key in outline.is_guess else 'read'}: {outline.evidence.get(key, '')}"


def _decimal_mark(columns: Sequence[Proposal]) -> list[str]:
    """The mark that most proven columns use; columns that prove another one say so themselves, open ones ask."""
    numbers = [c for c in columns if c.profile.kind == "number" and c.profile.marks.decimal]
    proven = Counter(c.profile.marks.decimal for c in numbers if c.profile.marks.decimal != OPEN)
    if not numbers:
        return [*comment("no number in a text has a decimal mark"), *entry("decimal_mark", ".")]
    if not proven:
        return [
            *comment(
                'marks before exactly three digits, or "." and "," side by side: is "." or "," the decimal mark?'
            ),
            *entry("decimal_mark", OPEN),
        ]
    usual = max(proven, key=lambda mark: (proven[mark], mark))
    cells = sum(c.profile.marks.n for c in numbers if c.profile.marks.decimal == usual)
    for made in numbers:
        marks = made.profile.marks
        if marks.decimal == OPEN:
            made.values["decimal_mark"] = OPEN
            made.say(
                "decimal_mark",
                f'its cells do not show whether "." or "," is the decimal mark; other columns of the file use "{usual}"',
            )
        elif marks.decimal != usual:
            made.values["decimal_mark"] = marks.decimal
            made.say("decimal_mark", f"other than the file: {marks.n} cells prove it")
        if marks.thousands:
            made.values["thousands_mark"] = marks.thousands
    return [*comment(f"{cells} cells of {_columns(proven[usual])} prove it"), *entry("decimal_mark", usual)]


def _pattern(columns: Sequence[Proposal]) -> list[str]:
    """The commonest pattern once for the file; columns with another one, or none, carry it themselves."""
    dated = [(c, c.profile.pattern) for c in columns if c.profile.pattern is not None]
    if not dated:
        return []
    proven = Counter(p.text for _, p in dated if p.text != OPEN)
    usual = max(proven, key=lambda text: (proven[text], text)) if proven else OPEN
    proofs = {p.proof for _, p in dated}
    if not proven and len(proofs) == 1 and not any("join" in c.values for c, _ in dated):
        return [*comment(f"dates in text: {proofs.pop()}"), *entry("pattern", OPEN)]
    for made, seen in dated:
        joined = " HH:mm" if "join" in made.values else ""
        if seen.text != usual or joined or usual == OPEN:
            made.values["pattern"] = seen.text + joined if seen.text != OPEN else OPEN
            made.say("pattern", seen.proof + ("; the time of day follows after a space" if joined else ""))
    if not proven:
        return []
    same = [p for _, p in dated if p.text == usual]
    counted = f"in {_columns(len(same))}, {sum(p.n_proof for p in same)} of {sum(p.n_same for p in same)} cells prove the order of day and month"
    return [*comment(f"dates in text: {counted}"), *entry("pattern", usual)]


def _columns(n: int) -> str:
    return "1 column" if n == 1 else f"{n} columns"


def _missing(columns: Sequence[Proposal]) -> list[str]:
    """Known words in columns of numbers and dates. A word that is also a code elsewhere is declared column by column."""
    held = [c for c in columns if c.profile.kind in ("number", "moment", "split") and c.profile.missing]
    codes = {code for c in columns if isinstance(c.values.get("codes"), dict) for code in c.profile.codes}
    common = sorted({word for c in held for word in c.profile.missing} - codes)
    for made in held:
        own = [word for word in made.profile.missing if word in codes]
        if own:
            made.values["missing"] = own
            made.say("missing", "this word stands where a value is missing; in another column it is a code")
    said = "known words that stand in columns of numbers or dates where a value is missing"
    return [*comment(said), *entry("missing", common)] if common else []


def _list_lines(sheet: DraftSheet) -> list[str]:
    code, meaning = list(sheet.columns)[:2]
    outline, lines = sheet.outline, []
    for number, (first, last) in enumerate(outline.blocks, start=1):
        lines += [
            "",
            *comment(f"A list of codes: {last - first + 1} rows of short codes beside words."),
            "[[file.sheet]]",
        ]
        lines += [
            f'key = "{list_key(sheet, number)}"',
            f"position = {outline.position}",
            f"header_line = {outline.header_line}",
            'row_is = "code list"',
        ]
        lines += [*entry("code", code), *entry("meaning", meaning)]
        if len(outline.blocks) > 1:
            lines.append(f"rows = [{first}, {last}]")
    return lines


def _sheet_lines(sheet: DraftSheet, *, explain: bool) -> list[str]:
    """explain: say once a file which answers the groups of empty cells take."""
    columns = kept(sheet)
    lines = [*_place_lines(sheet), *_key_lines(sheet)]
    if any(is_windowed(made) and "window" not in made.values for made in columns):
        said = (
            f"When were the measurements of this sheet taken? One of {', '.join(sorted(vocabulary().windows))}; "
            "pre_undated if it is only known that it was before support. "
            "A column that differs gets a line of its own: window = ..."
        )
        lines += [*comment(said), *entry("window", OPEN)]
    out = {p.header: p.why for p in sheet.proposals.values() if p.role == "leave_out"}
    for why in sorted(set(out.values())):
        lines += comment(f"{', '.join(h for h, w in out.items() if w == why)}: {why}")
    lines += entry("leave_out", list(out)) if out else []
    lines += _blank_lines(columns, explain=explain)
    return [
        *lines,
        *(line for made in columns for line in column_lines(made.header, made.values, made.comments)),
    ]


def _place_lines(sheet: DraftSheet) -> list[str]:
    outline = sheet.outline
    hidden = " This sheet is hidden in the workbook." if outline.is_hidden else ""
    return [
        "",
        *comment(f"{outline.n_rows} rows, {len(outline.headers)} columns.{hidden}"),
        "[[file.sheet]]",
        f'key = "{sheet.key}"',
        f"position = {outline.position}",
        *comment(_sure(outline, "header_line")),
        f"header_line = {outline.header_line}",
    ]


def _key_lines(sheet: DraftSheet) -> list[str]:
    """What a row is, and which columns name runs and persons."""
    kinds = '"run": one row a run; "event": one row a complication; "detail": several rows a run'
    lines = [*comment(f'{kinds}; "attempt": never reached flow'), *entry("row_is", sheet.row_is)]
    lines += [*comment(sheet.run_why), *entry("run", OPEN if sheet.run == OPEN else [sheet.run])]
    if sheet.person:
        alone = ' If the source names no persons, write person = [] and persons = "one run each".'
        lines += comment(f"{sheet.person_why}.{alone if sheet.person == OPEN else ''}")
        lines += entry("person", OPEN if sheet.person == OPEN else [sheet.person])
    return lines


def _blank_lines(columns: Sequence[Proposal], *, explain: bool) -> list[str]:
    """explain: the allowed answers, once a file."""
    if not columns:
        return []
    allowed = '"none" (it did not happen), "not applicable", "not recorded", "still on support" (only the end of support), "defect"'
    words = f"{allowed}. One answer covers all columns of its group; move a header to another group where the answer differs."
    lines = ["", *comment(f"What does an empty cell mean? {words if explain else ''}")]
    for question, headers in blank_groups(columns):
        lines += [
            "[[file.sheet.blank]]",
            *comment(question),
            *entry("means", OPEN),
            *entry("columns", headers),
        ]
    return lines
