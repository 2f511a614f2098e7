"""Crystals from tuples and from ASE, species and formulas."""

import pickle

import numpy as np
import pytest
from ase import Atoms
from ase.spacegroup import crystal as ase_crystal

from sitesym.crystals import Crystal, Species
from sitesym.crystals.species import SYMBOLS, reduced_formula
from sitesym.errors import CountMismatchError, NotPeriodicError


def test_text_of_a_species_is_its_content():
    assert str(Species.pure("O")) == "O"
    assert str(Species.mixed({"Sr": 0.4, "Ba": 0.6})) == "Ba0.6Sr0.4"
    assert str(Species.mixed({"Fe": 0.9})) == "Fe0.9"


def test_element_symbols_agree_with_those_of_ase():
    from ase.data import chemical_symbols

    assert SYMBOLS[1:] == tuple(chemical_symbols[1:])


@pytest.mark.parametrize(
    ("elements", "formula"),
    [
        ("O O O Ti Ba", "BaTiO3"),
        ("As Ga As Ga", "GaAs"),
        ("O Si O", "SiO2"),
        ("C C", "C"),
        ("O O O Nb Li", "LiNbO3"),
        ("O C O O Ca", "CaCO3"),
        ("Cl H", "HCl"),
        ("H H O", "H2O"),
    ],
)
def test_formula_is_reduced_and_runs_from_electropositive_to_electronegative(elements, formula):
    assert reduced_formula([Species.pure(element) for element in elements.split()]) == formula


def test_formula_of_a_mixed_crystal_is_that_of_its_supercell():
    mixed = [Species.mixed({"Ba": 0.6, "Sr": 0.4}), Species.pure("Ti"), *[Species.pure("O")] * 3]
    assert reduced_formula(mixed) == reduced_formula(mixed * 4) == "Ba0.6Sr0.4TiO3"


def test_arrays_cannot_be_changed_and_the_crystal_survives_pickling():
    crystal = Crystal.from_tuple((np.eye(3) * 4, [[0, 0, 0]], [29]))
    with pytest.raises(ValueError, match="read-only"):
        crystal.positions_frac[0, 0] = 1.0
    copy = pickle.loads(pickle.dumps(crystal))
    assert copy.labels == ("Cu1",)
    assert np.array_equal(copy.lattice, crystal.lattice)


def test_ase_atoms_keep_cell_positions_and_partial_occupancies():
    atoms = ase_crystal(
        ["Ba", "Ti", "O"],
        [(0.5, 0.5, 0.5), (0, 0, 0), (0.5, 0, 0)],
        spacegroup=221,
        cellpar=[3.965] * 3 + [90] * 3,
        occupancies=None,
    )
    atoms.info["occupancy"] = {"0": {"Ba": 0.6, "Sr": 0.4}, "1": {"Ti": 1.0}, "2": {"O": 1.0}}
    crystal = Crystal.from_ase(atoms)
    assert crystal.formula == "Ba0.6Sr0.4TiO3"
    assert not crystal.is_ordered
    assert np.allclose(crystal.positions_frac @ crystal.lattice, atoms.positions)


def test_occupancies_that_no_atom_can_be_given_are_not_dropped():
    atoms = Atoms("Po", cell=[3.3] * 3, pbc=True, info={"occupancy": {"0": {"Po": 0.5}}})
    with pytest.raises(CountMismatchError):
        Crystal.from_ase(atoms)


def test_a_molecule_is_refused():
    with pytest.raises(NotPeriodicError):
        Crystal.from_ase(Atoms("H2", positions=[[0, 0, 0], [0, 0, 0.74]]))
