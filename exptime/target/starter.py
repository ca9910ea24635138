"""The commented target file to begin with."""

from __future__ import annotations

import json
import re
from typing import Final

from exptime._resources import shipped_folder
from exptime.errors import Fault, InputError

LONGEST_NAME: Final = 200
_NAME_LINE: Final = re.compile(r"^name:.*$", re.MULTILINE)


def render_starter(name: str) -> str:
    """Return a commented target file that runs as it is.

    Parameters
    ----------
    name : str
        Name of the target: one line of at most 200 printable characters.

    Returns
    -------
    str
        YAML with invented values.

    Raises
    ------
    InputError
        When the name is empty, too long or cannot be printed.
    """
    name = name.strip()
    if not name or len(name) > LONGEST_NAME or not name.isprintable():
        what = f"a name of 1 to {LONGEST_NAME} printable characters is wanted."
        raise InputError(Fault(what, "", "Write for example: exptime start candidate"))
    template = shipped_folder("templates").joinpath("target.yaml").read_text(encoding="utf-8")
    # A JSON string is a quoted YAML string, whatever the name holds.
    line = f"name: {json.dumps(name, ensure_ascii=False)}"
    return _NAME_LINE.sub(lambda _: line, template, count=1)
