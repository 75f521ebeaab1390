"""Activity coefficients and water activity of concentrated brines.

The ion-interaction equations of Pitzer in the form of Harvie, Moller & Weare:
Debye-Hueckel term, pair coefficients beta0, beta1, beta2 and C_phi, mixing terms
theta and psi, the electrostatic mixing of like-charged ions of unequal charge, and
lambda terms of neutral molecules. Every coefficient may depend on temperature.
Species are plain names; one evaluation takes any number of compositions at one
temperature.

Left out: the zeta and mu terms of neutral molecules, and pressure.

References
----------
Pitzer 1973, J. Phys. Chem. 77, 268; Pitzer 1975, J. Solution Chem. 4, 249;
Harvie, Moller & Weare 1984, Geochim. Cosmochim. Acta 48, 723 (eqs. 1-2).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.pitzer_mixing import MixingCharges
from formbuf.chemistry.water import osmotic_slope
from formbuf.constants import (
    REFERENCE_TEMPERATURE_K,
    WATER_MOLAR_MASS_KG_MOL,
    ZERO_CELSIUS_K,
)
from formbuf.errors import InputError

Array = NDArray[np.float64]

#: b of the Debye-Hueckel term, kg^0.5 mol^-0.5 (Pitzer 1973).
DEBYE_HUCKEL_B = 1.2
#: alpha of the beta1 term for salts with a singly charged ion, kg^0.5 mol^-0.5.
ALPHA_1 = 2.0
#: alpha of the beta2 term, kg^0.5 mol^-0.5.
ALPHA_2 = 12.0
#: Coefficients of one parameter: value at 25 C and five temperature terms.
TERMS = 6
#: Smallest ionic strength used in the slopes with ionic strength, mol/kg.
_SMALLEST_IONIC_STRENGTH = 1e-14


@dataclass(frozen=True, slots=True)
class Coefficient:
    """One parameter as a function of temperature.

    p(T) = a0 + a1 (1/T - 1/Tr) + a2 ln(T/Tr) + a3 (T - Tr) + a4 (T^2 - Tr^2)
    + a5 (1/T^2 - 1/Tr^2), T in K, Tr = 298.15 K.

    Attributes
    ----------
    terms : tuple of float, length 6
        a0 to a5; a0 is the value at 25 C.
    """

    terms: tuple[float, float, float, float, float, float]

    @classmethod
    def constant(cls, value: float) -> Coefficient:
        """Return a parameter that keeps its 25 C value at every temperature."""
        return cls((value, 0.0, 0.0, 0.0, 0.0, 0.0))


@dataclass(frozen=True, slots=True)
class Pair:
    """Interaction of one cation with one anion.

    Attributes
    ----------
    cation, anion : str
    beta0, beta1, c_phi : Coefficient
    beta2 : Coefficient
        Zero except for salts of two doubly charged ions.
    alpha1 : float
        kg^0.5 mol^-0.5.
    """

    cation: str
    anion: str
    beta0: Coefficient
    beta1: Coefficient
    c_phi: Coefficient
    beta2: Coefficient = field(default_factory=lambda: Coefficient.constant(0.0))
    alpha1: float = ALPHA_1


@dataclass(frozen=True, slots=True)
class PitzerSet:
    """A consistent set of parameters.

    Attributes
    ----------
    name : str
    pairs : tuple of Pair
        A pair that is absent counts as zero.
    theta, lambdas : mapping of sorted name pairs to Coefficient
        Like-charged ions; a neutral molecule with an ion or with itself.
    psi : mapping of sorted name triples to Coefficient
    """

    name: str
    pairs: tuple[Pair, ...]
    theta: Mapping[tuple[str, str], Coefficient] = field(default_factory=dict)
    psi: Mapping[tuple[str, str, str], Coefficient] = field(default_factory=dict)
    lambdas: Mapping[tuple[str, str], Coefficient] = field(default_factory=dict)

    @property
    def ions(self) -> frozenset[str]:
        """Names of all ions with at least one pair."""
        return frozenset(n for p in self.pairs for n in (p.cation, p.anion))


def temperature_factors(temperature_c: float) -> Array:
    """Return the factors that multiply a0 to a5 of a `Coefficient` [shape (6,)]."""
    t = temperature_c + ZERO_CELSIUS_K
    r = REFERENCE_TEMPERATURE_K
    return np.array(
        [1.0, 1 / t - 1 / r, np.log(t / r), t - r, t * t - r * r, t**-2 - r**-2]
    )


@dataclass(frozen=True, slots=True)
class Interactions:
    """Parameters of the chosen species at one temperature, ready to evaluate."""

    a_phi: float
    beta0: Array
    screened: tuple[tuple[float, Array], ...]
    c: Array
    theta: Array
    neutral: Array
    psi: Array


class PitzerModel:
    """Ion-interaction model of a fixed list of species.

    Parameters
    ----------
    parameters : PitzerSet
    species : sequence of str, length n
        Solutes, water excluded; ions that the set does not know interact only
        through the Debye-Hueckel and electrostatic mixing terms.
    charges : sequence of int, length n
    neutral_slopes : mapping of str to float, optional
        b of the osmotic law phi = 1 + b m of a neutral solute [kg/mol].

    Raises
    ------
    InputError
        When species and charges differ in length.
    """

    def __init__(
        self,
        parameters: PitzerSet,
        species: Sequence[str],
        charges: Sequence[int],
        neutral_slopes: Mapping[str, float] | None = None,
    ) -> None:
        if len(species) != len(charges):
            msg = f"{len(species)} species but {len(charges)} charges"
            raise InputError(msg)
        self.parameters = parameters
        self.species = tuple(species)
        self.charges = np.asarray(charges, dtype=float)
        self._size = n = len(self.species)
        self._index = {name: i for i, name in enumerate(self.species)}
        self._beta0 = np.zeros((TERMS, n, n))
        self._screened: dict[float, Array] = {}
        self._c = np.zeros((TERMS, n, n))
        for pair in parameters.pairs:
            self._place_pair(pair)
        self._theta = self._matrix(parameters.theta)
        self._neutral = self._matrix(parameters.lambdas)
        for name, slope in (neutral_slopes or {}).items():
            if name in self._index:
                i = self._index[name]
                self._neutral[0, i, i] = slope
        self._psi = self._triples(parameters.psi)
        self._mixing = MixingCharges(self.charges)
        self._cache: dict[float, Interactions] = {}

    def _place_pair(self, pair: Pair) -> None:
        if pair.cation not in self._index or pair.anion not in self._index:
            return
        i, j = self._index[pair.cation], self._index[pair.anion]
        scale = 2.0 * np.sqrt(abs(self.charges[i] * self.charges[j]))
        _set(self._beta0, i, j, np.array(pair.beta0.terms))
        _set(self._c, i, j, np.array(pair.c_phi.terms) / scale)
        for alpha, beta in ((pair.alpha1, pair.beta1), (ALPHA_2, pair.beta2)):
            if any(beta.terms):
                shape = (TERMS, self._size, self._size)
                target = self._screened.setdefault(alpha, np.zeros(shape))
                _set(target, i, j, np.array(beta.terms))

    def _matrix(self, table: Mapping[tuple[str, str], Coefficient]) -> Array:
        matrix = np.zeros((TERMS, self._size, self._size))
        for (one, other), value in table.items():
            if one in self._index and other in self._index:
                _set(
                    matrix, self._index[one], self._index[other], np.array(value.terms)
                )
        return matrix

    def _triples(self, table: Mapping[tuple[str, str, str], Coefficient]) -> Array:
        cube = np.zeros((TERMS, self._size, self._size, self._size))
        for names, value in table.items():
            if all(name in self._index for name in names):
                i, j, k = (self._index[name] for name in names)
                for a, b, c in (
                    (i, j, k),
                    (i, k, j),
                    (j, i, k),
                    (j, k, i),
                    (k, i, j),
                    (k, j, i),
                ):
                    cube[:, a, b, c] = value.terms
        return cube

    def at(self, temperature_c: float) -> Interactions:
        """Return the parameters at one temperature [C], valid -39 to 100."""
        found = self._cache.get(temperature_c)
        if found is None:
            f = temperature_factors(temperature_c)
            found = Interactions(
                float(osmotic_slope(temperature_c)),
                np.tensordot(f, self._beta0, 1),
                tuple((a, np.tensordot(f, b, 1)) for a, b in self._screened.items()),
                np.tensordot(f, self._c, 1),
                np.tensordot(f, self._theta, 1),
                np.tensordot(f, self._neutral, 1),
                np.tensordot(f, self._psi, 1).reshape(self._size**2, self._size),
            )
            if len(self._cache) > 512:
                self._cache.clear()
            self._cache[temperature_c] = found
        return found

    def evaluate(
        self, molality_mol_kg: ArrayLike, temperature_c: float
    ) -> tuple[Array, Array]:
        """Activity coefficients and water activity.

        Parameters
        ----------
        molality_mol_kg : array_like, shape (..., n)
            Molality of each species [mol/kg water], in the order of ``species``.
        temperature_c : float
            Temperature [C].

        Returns
        -------
        ln_gamma : ndarray, shape (..., n)
            Natural log of each activity coefficient, molal scale, single ions on
            the scale of the equations themselves.
        ln_water_activity : ndarray, shape (...)
        """
        p = self.at(temperature_c)
        m = np.asarray(molality_mol_kg, dtype=float)
        z = self.charges
        ionic = 0.5 * (m @ (z * z))
        ionic = np.maximum(ionic, _SMALLEST_IONIC_STRENGTH)
        root = np.sqrt(ionic)
        size = m @ np.abs(z)
        debye = 1.0 + DEBYE_HUCKEL_B * root
        f = -p.a_phi * (root / debye + 2.0 / DEBYE_HUCKEL_B * np.log(debye))
        linear = m @ p.beta0
        osmotic = -p.a_phi * ionic * root / debye + 0.5 * _dot(m, linear)
        for alpha, beta in p.screened:
            x = alpha * root
            decay = np.exp(-x)
            pair = m @ beta
            strength = 0.5 * _dot(m, pair)
            g = 2.0 * (1.0 - (1.0 + x) * decay) / (x * x)
            linear = linear + g[..., np.newaxis] * pair
            f = f + strength * (decay - g) / ionic
            osmotic = osmotic + strength * decay
        third = m @ p.c
        triple = 0.5 * _dot(m, third)
        osmotic = osmotic + size * triple
        mixing = m @ (p.theta + p.neutral)
        osmotic = osmotic + 0.5 * _dot(m, mixing)
        electro, electro_slope = self._mixing.at(p.a_phi, root, m)
        if electro is not None and electro_slope is not None:
            mixing = mixing + electro
            f = f + electro_slope
            osmotic = osmotic + 0.5 * _dot(m, electro) + ionic * electro_slope
        pairs = (m @ p.psi.T).reshape(*m.shape, self._size)
        psi = 0.5 * np.einsum("...ij,...j->...i", pairs, m)
        osmotic = osmotic + _dot(m, psi) / 3.0
        ln_gamma = (
            (z * z) * f[..., np.newaxis]
            + 2.0 * (linear + mixing)
            + size[..., np.newaxis] * third
            + np.abs(z) * triple[..., np.newaxis]
            + psi
        )
        ln_water = -WATER_MOLAR_MASS_KG_MOL * (m.sum(axis=-1) + 2.0 * osmotic)
        return ln_gamma, ln_water


def osmotic_coefficient(
    ln_water_activity: ArrayLike, molality_mol_kg: ArrayLike
) -> Array:
    """Osmotic coefficient from the water activity.

    Parameters
    ----------
    ln_water_activity : array_like, shape (...)
    molality_mol_kg : array_like, shape (..., n)
        Molality of every solute species [mol/kg water].

    Returns
    -------
    ndarray, shape (...)
        phi = -ln(a_w) / (M_w sum m) [-].
    """
    total = np.asarray(molality_mol_kg, dtype=float).sum(axis=-1)
    phi: Array = -np.asarray(ln_water_activity) / (WATER_MOLAR_MASS_KG_MOL * total)
    return phi


def _set(target: Array, i: int, j: int, terms: Array) -> None:
    target[:, i, j] = terms
    target[:, j, i] = terms


def _dot(a: Array, b: Array) -> Array:
    total: Array = np.einsum("...i,...i->...", a, b)
    return total
