"""How many examples a property is tried with: few in the usual run, so many times more in a long one.

`TAREBOOK_LONGER=50 python -m pytest -k "not benchmark"` is the long run of everything random.
"""

import os

LONGER = int(os.environ.get("TAREBOOK_LONGER", "1"))


def times(few: int) -> int:
    """The number of examples for a property that usually has a few."""
    return few * LONGER
