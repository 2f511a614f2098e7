"""Many structures, one row of verdicts each: sources of structures, workers, a store, questions to it.

Only what starts a run is loaded here; workers load the rest.
"""

from sitesym.screening.columns import COLUMNS, Column, Row, columns_for
from sitesym.screening.engine import Screening, available_cores, screen
from sitesym.screening.settings import Settings
from sitesym.screening.store import Store
from sitesym.screening.tally import Tally
from sitesym.screening.task import Task
from sitesym.screening.work import WorkItem

__all__ = [
    "COLUMNS",
    "Column",
    "Row",
    "Screening",
    "Settings",
    "Store",
    "Tally",
    "Task",
    "WorkItem",
    "available_cores",
    "columns_for",
    "screen",
]
