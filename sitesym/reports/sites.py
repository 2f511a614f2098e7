"""The `sites` document: crystal, setting, and each site with its group, operations and axes."""

from __future__ import annotations

from typing import Any

from sitesym.crystals import CrystalSymmetry, Site, SiteAxis
from sitesym.crystals.operations import xyz_text
from sitesym.crystals.remarks import symmetry_remarks
from sitesym.reports.markup import Document
from sitesym.reports.provenance import CAUTION, library_versions
from sitesym.reports.reliability import reliability_entries

SCHEMA = "sitesym.sites/1"


def sites_document(symmetry: CrystalSymmetry) -> Document:
    """The document `sitesym.sites/1` of a crystal's symmetry: strict JSON types, lengths in angstrom.

    Directions ending in ``_file`` are unit vectors in the file's Cartesian axes, those ending in
    ``_lattice`` refer to the conventional cell, as do the operations. Raises SymmetryError when a site is
    not consistent.
    """
    return {
        "schema": SCHEMA,
        "crystal": crystal_entry(symmetry),
        "sites": [site_entry(site) for site in symmetry.sites],
        "remarks": crystal_remarks(symmetry),
        "versions": library_versions(),
        "caution": CAUTION,
    }


def crystal_entry(symmetry: CrystalSymmetry) -> dict[str, Any]:
    """What every document says of a crystal: formula, space group, setting, cells, tolerance,
    idealisation."""
    crystal, setting, change = symmetry.crystal, symmetry.setting, symmetry.idealisation
    return {
        "formula": crystal.formula,
        "atoms": len(crystal),
        "source": crystal.source.file or None,
        "format": crystal.source.format,
        "part": crystal.source.part or None,
        "declared_space_group": crystal.declared_space_group or None,
        "distinguished_by": ["element", "occupancy", *crystal.distinguish],
        "space_group_number": setting.number,
        "space_group": setting.symbol,
        "hall_number": setting.hall_number,
        "hall_symbol": setting.hall_symbol,
        "choice": setting.choice or None,
        "point_group": symmetry.point_group.symbol,
        "point_group_oriented": symmetry.point_group.oriented,
        "tolerance_angstrom": float(symmetry.tolerance_angstrom),
        "tolerance_used_angstrom": float(symmetry.found.tolerance_used_angstrom),
        "finder": symmetry.found.finder,
        "frame": crystal.frame_note,
        "lattice": crystal.lattice.tolist(),
        "conventional_lattice": symmetry.conventional_lattice.tolist(),
        "transformation": symmetry.transformation.tolist(),
        "origin_shift": symmetry.origin_shift.tolist(),
        "transformation_rule": "x_conventional = transformation x_file + origin_shift",
        "idealisation": {
            "largest_strain": change.largest_strain,
            "orthogonality_error": change.orthogonality_error,
            "largest_shift_angstrom": change.largest_shift_angstrom,
            "operations": _operation_changes(symmetry),
        },
        **reliability_entries(symmetry),
    }


def _operation_changes(symmetry: CrystalSymmetry) -> list[dict[str, Any]]:
    """How far each operation of the point group is from being exact in the file."""
    change = symmetry.idealisation
    rows = zip(
        symmetry.point_group.names,
        change.operation_displacements_angstrom.tolist(),
        change.operation_strains.tolist(),
        strict=True,
    )
    return [
        {"name": name, "displacement_angstrom": displacement, "strain": strain}
        for name, displacement, strain in rows
    ]


def crystal_remarks(symmetry: CrystalSymmetry) -> list[str]:
    """Remarks of reading, and what stands in every result about this crystal."""
    return list(symmetry_remarks(symmetry))


def site_entry(site: Site) -> dict[str, Any]:
    """What a document says of one site."""
    return {
        "label": site.label,
        "species": site.species,
        "atoms": list(site.atoms),
        "multiplicity": site.multiplicity,
        "wyckoff": site.wyckoff,
        "site_symmetry": site.symbol,
        "point_group": site.point_group.symbol,
        "point_group_oriented": site.point_group.oriented,
        "order": site.order,
        "has_inversion": site.has_inversion,
        "has_mirror": site.has_mirror,
        "polar": site.is_polar,
        "polar_directions_file": site.point_group.polar_directions.tolist(),
        "position_conventional": site.position_frac.tolist(),
        "operations": _operations(site),
        "axes": [_axis_entry(axis) for axis in site.axes],
    }


def _operations(site: Site) -> list[dict[str, Any]]:
    operations = zip(site.point_group.names, site.rotations, site.translations, strict=True)
    return [
        {"name": name, "xyz": xyz_text(rotation, translation), "rotation_frac": rotation.tolist()}
        for name, rotation, translation in operations
    ]


def _axis_entry(axis: SiteAxis) -> dict[str, Any]:
    return {
        "name": axis.symbol,
        "order": axis.order,
        "improper": axis.improper,
        "direction_file": (axis.direction_file + 0.0).tolist(),  # adding zero turns -0.0 into 0.0
        "direction_lattice": axis.direction_lattice,
    }
