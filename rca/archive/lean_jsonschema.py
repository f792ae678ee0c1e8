"""jsonschema without its slowest optional format checker, which takes longer to import than all.

The checker of internationalised addresses compiles a grammar on import, for seconds, wherever
JupyterLab happens to be installed. No schema here asks for that format. Import this module before
anything that imports jsonschema.
"""

import sys
from typing import Any

_SLOW = "rfc3987_syntax"


def _import_without(name: str) -> None:
    if "jsonschema" in sys.modules or name in sys.modules:
        return
    modules: Any = sys.modules
    modules[name] = None  # hides it from the import system
    try:
        import jsonschema  # noqa: F401, PLC0415
    finally:
        del modules[name]


_import_without(_SLOW)
