"""The one place where Jinja is set up: sandboxed, everything escaped, an unknown name is an error."""

from __future__ import annotations

from collections.abc import Mapping

from jinja2 import FunctionLoader, StrictUndefined
from jinja2.sandbox import ImmutableSandboxedEnvironment


def sandbox(templates: Mapping[str, str], *, trim_blocks: bool = True) -> ImmutableSandboxedEnvironment:
    """An environment that knows these templates (name → text) and no files.

    trim_blocks: a line that holds only a statement leaves no line behind; right for pages, wrong for prose.
    """
    return ImmutableSandboxedEnvironment(
        loader=FunctionLoader(lambda name: templates.get(name)),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=trim_blocks,
        lstrip_blocks=trim_blocks,
    )
