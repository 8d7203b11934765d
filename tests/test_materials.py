"""Shipped materials: isotopes against published tables, defaults against their ranges, a source for every value."""

from __future__ import annotations

import re
import tomllib
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import mendeleev
import numpy as np
import pytest

from planner.constants import BOHR_MAGNETON, MICRO_EV
from planner.evaluate import evaluate
from planner.kinds import CHARGE_NOISE, COUNT, DISPLACEMENT, FRACTION, RELATIVE_NOISE, Kind, parse
from planner.materials import Nucleus, Sourced, edition, isotope_fraction, material, material_titles
from planner.physics.nuclei import barrier_bath_noise, bath_noise
from planner.planfile import read
from planner.references import references
from tests.planmaking import of

ROOT = Path(__file__).parents[1]
TABLE = tomllib.loads((ROOT / "planner" / "data" / "materials.toml").read_text(encoding="utf-8"))
KIND_OF = {
    "spinful_fraction": FRACTION, "nuclei": COUNT, "barrier_germanium": FRACTION, "barrier_share": FRACTION,
    "barrier_nuclei": COUNT, "barrier_spinful": FRACTION, "charge_noise": CHARGE_NOISE, "displacement": DISPLACEMENT,
    "relative_noise": RELATIVE_NOISE,
}  # fmt: skip
NAMES = sorted(material_titles())


def kind_of(key: str) -> Kind:
    return KIND_OF[key.removeprefix("model.")]


def number(key: str, text: str) -> float:
    value = parse(kind_of(key), text).value
    assert isinstance(value, float)
    return value


def default(name: str, key: str) -> float:
    return number(key, material(name).values[f"model.{key}"].text)


def every_source() -> list[tuple[str, Sourced]]:
    """Every sourced value of every material under a name for messages."""
    found = [(f"{name} {key}", source) for name in NAMES for key, source in material(name).values.items()]
    nuclei = [(name, nucleus) for name in NAMES for nucleus in (*material(name).nuclei, material(name).barrier)]
    return found + [(f"{name} {nucleus.isotope}", nucleus.source) for name, nucleus in nuclei]


@pytest.mark.parametrize(
    ("isotope", "spin", "published"),
    [
        # C4. Fractions: NIST Atomic Weights and Isotopic Compositions (IUPAC 2009); spins: any table of nuclear moments
        # (Stone, INDC(NDS)-0794, from memory)
        ("29Si", 1 / 2, 0.04685),
        ("73Ge", 9 / 2, 0.0775),
        ("69Ga", 3 / 2, 0.60108),
        ("71Ga", 3 / 2, 0.39892),
        ("75As", 3 / 2, 1.0),
    ],
)
def test_isotopes_are_those_of_nist(isotope: str, spin: float, published: float) -> None:
    assert isotope_fraction(isotope) == (spin, published)


@pytest.mark.parametrize(
    ("isotope", "tolerance"), [("29Si", 5e-3), ("73Ge", 2e-2), ("69Ga", 1e-4), ("71Ga", 1e-4), ("75As", 1e-4)]
)
def test_isotopes_agree_with_a_later_table(isotope: str, tolerance: float) -> None:
    # mendeleev follows a newer IUPAC table than NIST, hence the tolerances of 29Si and 73Ge; spins are exact
    listed = next(i for i in mendeleev.element(isotope[2:]).isotopes if i.mass_number == int(isotope[:2]))
    spin, fraction = isotope_fraction(isotope)
    assert spin == float(Fraction(listed.spin))
    assert fraction == pytest.approx(listed.abundance / 100, rel=tolerance)


def test_spins_are_half_integer_as_the_odd_mass_numbers_ask() -> None:
    for isotope in TABLE["isotope"]:
        spin, _ = isotope_fraction(isotope)
        assert int(isotope[:2]) % 2 == 1 and (2 * spin) % 2 == 1


def test_gaas_weights_are_twice_the_fractions_on_each_sublattice() -> None:
    # sigma^2 = (2/N) sum x_j (A_j^cell)^2 I(I+1)/3 with x_j per sublattice and N all atoms
    for nucleus in material("gaas").nuclei:
        assert nucleus.weight == pytest.approx(2 * isotope_fraction(nucleus.isotope)[1], rel=1e-12)


def test_gaas_couplings_make_the_largest_overhauser_field() -> None:
    # E_max = sum x_j A_j I_j: 132.46 ueV (by = regression), 5.2 T at g = 0.44; Paget et al. 1977 are quoted with 5.3 T
    # (from memory)
    host = material("gaas")
    largest = sum(n.weight / 2 * n.coupling * n.spin for n in host.nuclei)
    assert largest / MICRO_EV == pytest.approx(132.463314, rel=1e-5)
    assert largest / (0.44 * BOHR_MAGNETON) == pytest.approx(5.3, rel=0.03)


def test_moment_of_one_nucleus() -> None:
    source = Sourced(text="2 ueV", low="1 ueV", high="3 ueV", reference="memory", status="from memory")
    one = Nucleus(isotope="73Ge", spin=4.5, weight=0.5, coupling=2 * MICRO_EV, source=source)
    unit = 0.5 * MICRO_EV**2 * 4.5 * 5.5 / 3
    assert one.moment == pytest.approx(4 * unit)
    assert one.moment_ends == pytest.approx((unit, 9 * unit))
    certain = replace(one, source=replace(source, low=None, high=None))
    assert certain.moment_ends == pytest.approx((4 * unit, 4 * unit))


def t2_star(name: str, *, nuclei: float, fraction: float | None = None) -> float:
    """sqrt(2) / (2 pi sigma): 1/e time of exp(-(t/T2*)^2) in the material's bath alone, for a hole along its axis, s."""
    spinful = default(name, "spinful_fraction") if fraction is None else fraction
    noise = bath_noise(
        moment=np.array(material(name).moment), spinful_fraction=np.array(spinful), nuclei=np.array(nuclei)
    )
    return float(np.sqrt(2) / (2 * np.pi * noise))


@pytest.mark.parametrize(
    ("name", "nuclei", "seconds"),
    [
        # sigma^2 = x A^2 I(I+1)/(3 N), computed once outside this package with the CODATA 2022 constants of scipy
        ("si-sige-natural", 1e5, 0.632539e-6),
        ("si-mos-natural", 1e5, 0.632539e-6),
        ("si-sige-800ppm", 1e5, 4.84058e-6),
        ("si-mos-800ppm", 1e5, 4.84058e-6),
        ("si-sige-60ppm", 1e5, 17.6753e-6),
        ("si-sige-60ppm", 4e5, 35.3506e-6),
        ("si-mos-800ppm", 5e4, 3.42281e-6),
        ("ge-sige-natural", 1e6, 1.05830e-6),
        ("gaas", 1e6, 9.38929e-9),
    ],
)
def test_decay_in_the_bath_of_a_material(name: str, nuclei: float, seconds: float) -> None:
    assert t2_star(name, nuclei=nuclei) == pytest.approx(seconds, rel=1e-5)


def test_silicon_of_50_ppm_decays_later() -> None:
    assert t2_star("si-sige-60ppm", nuclei=1e5, fraction=50e-6) == pytest.approx(19.3623e-6, rel=1e-5)


@pytest.mark.parametrize(
    ("name", "published"),
    [
        # A plausible number of nuclei exists for each of these devices; it was not published with them, so a factor of 2
        # is all that can be asked. Takeda et al. 2021, 1.82, 1.69, 1.69 us; Kawakami et al. 2014, 1 us, and 2016, 0.9 us
        ("si-sige-natural", 1.69e-6),
        ("si-sige-natural", 1.0e-6),
        ("si-sige-natural", 0.9e-6),
        ("si-fin-natural", 0.4e-6),  # Camenzind et al. 2022, from memory
    ],
)
def test_natural_silicon_decays_as_in_published_devices(name: str, published: float) -> None:
    assert published / 2 <= t2_star(name, nuclei=default(name, "nuclei")) <= 2 * published


def test_purified_hosts_whose_bath_is_of_few_nuclei() -> None:
    # 40 of 29Si under a MOS dot of 800 ppm (the published case that the formula missed by 35 times), 24 in a 60 ppm well
    spinful = {name: default(name, "nuclei") * default(name, "spinful_fraction") for name in NAMES}
    few = {name: count for name, count in spinful.items() if count < 100}
    assert few == pytest.approx({"si-mos-800ppm": 40, "si-sige-60ppm": 24})


@pytest.mark.parametrize("name", NAMES)
def test_every_material_makes_a_plan(name: str) -> None:
    text = (ROOT / "plans" / "minimal.toml").read_text("utf-8").replace("si-sige-natural", name)
    evaluation = evaluate(read(text, "minimal.toml").plan)
    assert of(evaluation, "noise.nuclear") == pytest.approx(
        1 / (np.sqrt(2) * np.pi * t2_star(name, nuclei=default(name, "nuclei")))
    )
    assert evaluation.margins


@pytest.mark.parametrize("name", NAMES)
def test_every_default_is_read_and_lies_in_its_range(name: str) -> None:
    for key, source in material(name).values.items():
        low, value, high = (number(key, text or source.text) for text in (source.low, source.text, source.high))
        assert low <= value <= high, key
        assert (source.low is None) == (source.high is None), key


def test_couplings_lie_in_their_ranges() -> None:
    for name in NAMES:
        for nucleus in (*material(name).nuclei, material(name).barrier):
            low, high = nucleus.moment_ends
            assert low <= nucleus.moment <= high, (name, nucleus.isotope)


def test_every_value_has_a_status_and_a_known_reference() -> None:
    for where, source in every_source():
        assert source.reference in references(), where
        assert source.status in ("read", "computed", "from memory"), where
    for isotope, entry in TABLE["isotope"].items():
        assert entry["fraction"]["reference"] in references(), isotope


def test_every_material_brings_a_default_for_the_whole_model() -> None:
    for name in NAMES:
        holes_only = set() if material(name).hole else {"model.relative_noise"}
        assert {f"model.{key}" for key in KIND_OF} - holes_only == set(material(name).values), name


def test_natural_hosts_hold_the_natural_fraction() -> None:
    assert default("si-sige-natural", "spinful_fraction") == pytest.approx(isotope_fraction("29Si")[1])
    assert default("ge-sige-natural", "spinful_fraction") == pytest.approx(isotope_fraction("73Ge")[1])
    assert default("si-sige-800ppm", "spinful_fraction") == pytest.approx(800e-6)
    assert default("si-mos-natural", "spinful_fraction") == pytest.approx(isotope_fraction("29Si")[1])
    assert default("si-fin-natural", "spinful_fraction") == pytest.approx(isotope_fraction("29Si")[1])
    assert default("gaas", "spinful_fraction") == 1.0
    for name in NAMES:
        assert default(name, "barrier_spinful") == pytest.approx(isotope_fraction("73Ge")[1])


def test_only_silicon_germanium_wells_have_a_barrier_share() -> None:
    shares = {name: default(name, "barrier_share") for name in NAMES}
    assert {name for name, share in shares.items() if share > 0} == {n for n in NAMES if n.startswith("si-sige")}


def barrier_noise(name: str) -> float:
    found = barrier_bath_noise(
        moment=np.array(material(name).barrier.moment),
        germanium=np.array(default(name, "barrier_germanium")), spinful=np.array(default(name, "barrier_spinful")),
        share=np.array(default(name, "barrier_share")), nuclei=np.array(default(name, "barrier_nuclei")),
    )  # fmt: skip
    return float(found)


@pytest.mark.parametrize("name", [name for name in NAMES if not name.startswith("si-sige")])
def test_a_barrier_without_a_share_makes_no_noise(name: str) -> None:
    assert barrier_noise(name) == 0


def test_the_shipped_barrier_shortens_a_purified_well_as_published() -> None:
    # Jacobson et al. (2026), second hand: S-T0 pair in an 800 ppm well, 4.41 us; two equal dots, numbers as shipped
    well = 1 / (np.sqrt(2) * np.pi * t2_star("si-sige-800ppm", nuclei=default("si-sige-800ppm", "nuclei")))
    pair = np.sqrt(2) * np.hypot(well, barrier_noise("si-sige-800ppm"))
    assert 1 / (np.sqrt(2) * np.pi * pair) == pytest.approx(4.41e-6, rel=0.3)


def test_carriers_and_valleys() -> None:
    assert {name for name in NAMES if material(name).hole} == {"ge-sige-natural", "ge-sige-500ppm", "si-fin-natural"}
    with_valleys = {name for name in NAMES if name.startswith(("si-sige-", "si-mos-"))}
    assert {name for name in NAMES if material(name).valleys} == with_valleys


def test_the_shipped_materials_are_those_of_the_readme() -> None:
    listed = next(
        bullet for bullet in (ROOT / "README.md").read_text("utf-8").split("\n- ") if "**Materials**" in bullet
    )
    assert set(re.findall(r"`([\w-]+)`", listed)) == set(NAMES)
    assert edition().count(".") == 1


def test_the_name_of_a_purified_material_is_its_fraction() -> None:
    purified = {name: re.search(r"(\d+)ppm", name) for name in NAMES}
    fractions = {name: float(found[1]) for name, found in purified.items() if found}
    assert len(fractions) == 4
    assert {name: default(name, "spinful_fraction") * 1e6 for name in fractions} == pytest.approx(fractions)


def atoms(*, mass: float, orbital_mev: float, thickness: float, lattice: float) -> float:
    """Participation number of a Gaussian dot in an infinite well: n_at 2 pi l^2 (2 w / 3), lengths in nm."""
    squared = 0.0761996422e3 / (mass * orbital_mev)  # l^2 = hbar^2/(m* E), hbar^2/m_e = 0.0762 eV nm^2
    return 8 / lattice**3 * 2 * np.pi * squared * 2 * thickness / 3


@pytest.mark.parametrize(
    ("name", "mass", "lattice", "orbital_mev", "thickness"),
    [
        # effective masses and sizes from memory; lattice constants 0.5431, 0.5658, 0.5653 nm from memory (any handbook)
        ("si-sige-natural", 0.19, 0.5431, (1.0, 2.0), (5.0, 8.0)),
        ("si-mos-natural", 0.19, 0.5431, (4.0, 8.0), (4.0, 4.0)),
        ("ge-sige-natural", 0.06, 0.5658, (1.0, 2.0), (16.0, 20.0)),
        ("gaas", 0.067, 0.5653, (1.0, 2.0), (10.0, 10.0)),
    ],
)
def test_default_number_of_nuclei_is_that_of_a_plausible_dot(
    name: str, mass: float, lattice: float, orbital_mev: tuple[float, float], thickness: tuple[float, float]
) -> None:
    few = atoms(mass=mass, orbital_mev=orbital_mev[1], thickness=thickness[0], lattice=lattice)
    many = atoms(mass=mass, orbital_mev=orbital_mev[0], thickness=thickness[1], lattice=lattice)
    assert few <= default(name, "nuclei") <= many


def test_a_material_that_is_not_shipped_is_refused() -> None:
    with pytest.raises(KeyError):
        material("unobtainium")
