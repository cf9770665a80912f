"""The argument parser of every verb."""

from __future__ import annotations

import argparse
import re
from typing import NoReturn

from outcomes.errors import UsageError


class Parser(argparse.ArgumentParser):
    """Usage errors in our form; what was typed is not repeated: a file name may hold an identifier."""

    def error(self, message: str) -> NoReturn:
        about = re.match(r"argument [^:]*", message)
        needed = re.match(r"the following arguments are required: .*", message)
        known = about or needed
        what = known.group(0) if known else "the arguments are not understood"
        raise UsageError("USAGE.ARGUMENTS", what, todo=f"{self.prog} --help")
