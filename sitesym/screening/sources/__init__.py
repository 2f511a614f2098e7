"""Where structures come from. Each source is a lazy stream of units of work, in an order that stays.

A source never raises for one entry: what cannot be read becomes a unit that turns into a row with its error.
"""

from sitesym.screening.sources.folders import folder_items
from sitesym.screening.sources.opening import work_items

__all__ = ["folder_items", "work_items"]
