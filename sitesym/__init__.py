"""From a crystal structure file to its site symmetries, irreps and symmetry-allowed tensor components.

The names below load on first use, so that ``import sitesym`` stays light.
"""

__version__ = "0.1.0"
