"""From what the person passed to series on a regular index."""

from preflight_magic.intake.mend import REPAIRS
from preflight_magic.intake.read import read

__all__ = ["REPAIRS", "read"]
