"""`swe new CASE`: write a commented case file to start from; an existing file is never replaced."""

from __future__ import annotations

from pathlib import Path


def run(options) -> int:
    from swe.case.template import new_case_template
    from swe.errors import FileError

    path = Path(options.case)
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(new_case_template())
    except FileExistsError:
        raise FileError(f"{path}: is there already and is not replaced; choose another name") from None
    except OSError as trouble:
        raise FileError(f"{path}: cannot be written ({trouble.strerror}); choose a folder that exists and is yours") from None
    print(f"wrote {path}; set its keys, then: swe check {path}")
    return 0
