"""From what the person passed to series on a regular index."""

from preflight_magic.intake.read import REPAIRS, read

__all__ = ["REPAIRS", "read"]
