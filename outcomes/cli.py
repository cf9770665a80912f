"""The command `outcomes`: finds the verb, runs it, turns errors into three lines and an exit code."""

from __future__ import annotations

import argparse
import ast
import importlib
import importlib.util
import pkgutil
import sys
import traceback
from collections.abc import Sequence

from outcomes import command
from outcomes.command._parser import Parser
from outcomes.errors import OutcomesError, UsageError

INTERRUPTED = 130


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; returns its exit code (errors.py draws the tree of codes)."""
    words = list(sys.argv[1:] if argv is None else argv)
    debug = "--debug" in words
    try:
        return _run([w for w in words if w != "--debug"])
    except OutcomesError as error:
        print("\n".join(error.lines()), file=sys.stderr)
        return error.exit_code
    except KeyboardInterrupt:
        print("INTERRUPTED: nothing was changed", file=sys.stderr)
        return INTERRUPTED
    except BrokenPipeError:
        return 0
    except Exception as error:
        _report_bug(error, debug)
        return 1


def _report_bug(error: Exception, debug: bool) -> None:
    """Our own mistake. The exception may quote a value: only its type and the places are shown."""
    print(f"INTERNAL.BUG: {type(error).__name__}", file=sys.stderr)
    if debug:
        for place in traceback.extract_tb(error.__traceback__):
            name = place.filename.replace("\\", "/").rsplit("/outcomes/", 1)[-1].rsplit("/", 1)[-1]
            print(f"  {name}:{place.lineno} in {place.name}", file=sys.stderr)
    else:
        print("  what to do: report this; --debug shows where it happened, without values", file=sys.stderr)


def _run(words: list[str]) -> int:
    verbs = {
        m.name.replace("_", "-"): m.name
        for m in pkgutil.iter_modules(command.__path__)
        if not m.name.startswith("_")
    }
    verbs["import"] = verbs.pop("import-files")
    if not words or words[0] in ("-h", "--help", "help"):
        print(_overview(verbs))
        return 0
    if words[0] == "--version":
        print(importlib.import_module("outcomes").__version__)
        return 0
    if words[0] not in verbs:
        raise UsageError("USAGE.COMMAND", "there is no such command", todo="outcomes --help lists them")
    module = importlib.import_module(f"outcomes.command.{verbs[words[0]]}")
    parser = Parser(
        prog=f"outcomes {words[0]}",
        description=module.__doc__,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    module.arguments(parser)
    return int(module.run(parser.parse_args(words[1:])))


def _overview(verbs: dict[str, str]) -> str:
    lines = ["usage: outcomes COMMAND …   (outcomes COMMAND --help says more)", ""]
    for verb, name in sorted(verbs.items()):
        spec = importlib.util.find_spec(f"outcomes.command.{name}")
        source = (
            spec.loader.get_source(spec.name)
            if spec and spec.loader and hasattr(spec.loader, "get_source")
            else ""
        )
        first = (ast.get_docstring(ast.parse(source or "")) or "").split("\n")[0]
        lines.append(f"  {verb:<12} {first}")
    lines += [
        "",
        "It informs review and research, never a bedside decision. "
        "Add --debug to see where an internal error arose.",
    ]
    return "\n".join(lines)


if __name__ == "__main__":
    sys.exit(main())
