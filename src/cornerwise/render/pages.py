"""What every HTML page needs: templates that escape, assets inlined, a policy that fetches nothing."""

from __future__ import annotations

import base64
import hashlib
from importlib.resources import files

from jinja2 import Environment, PackageLoader, StrictUndefined


def environment(package: str) -> Environment:
    """Templates of a package; whatever is filled in is escaped."""
    return Environment(
        loader=PackageLoader(package),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def asset(package: str, name: str) -> str:
    """Text of a file beside a package's templates."""
    return (files(package) / "templates" / name).read_text(encoding="utf-8")


def policy(style: str, script: str | None = None) -> str:
    """Content security policy: this style, this script or none, no request to anywhere."""

    def allowed(text: str) -> str:
        return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode('utf-8')).digest()).decode('ascii')}'"

    scripts = f"script-src {allowed(script)}; " if script is not None else ""
    return f"default-src 'none'; style-src {allowed(style)}; {scripts}base-uri 'none'; form-action 'none'"
