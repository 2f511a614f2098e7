"""Many structures, one row of verdicts each."""

from sitesym.screening.folder import screen_folder, structure_files
from sitesym.screening.rows import COLUMNS, Row, Screener

__all__ = ["COLUMNS", "Row", "Screener", "screen_folder", "structure_files"]
