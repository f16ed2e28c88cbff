"""What pores do to order and barrier is shown beside what is solved from them."""

import numpy as np
import pytest
from simulated_campaign import simulate, snapshot, with_facts

from campaign.kinetics.porous import apparent_resistance
from campaign.ledger.criteria import Criteria
from campaign.ledger.readings import ElectrolyteFacts
from campaign.trends import concentration, temperature
from campaign.trends.reading import beside_apparent

PORE = 400.0  # ohm cm2, far above R_ct: the limit of the transmission line


def porous_campaign(rng):
    """R_ct with order 0.5 and 50 kJ/mol seen through pores of one resistance."""
    rows = simulate(rng, between=0.05, within=0.01, base=20.0, se=None)
    for row in rows:
        row["R_ct"] = float(apparent_resistance(row["R_ct"], PORE))
    electrolytes = [
        ElectrolyteFacts(
            snapshot([row]).readings.electrolyte[0], conductivity=((250.0, 0.01), (350.0, 0.01))
        )
        for row in rows
    ]
    campaign = snapshot(rows, electrolytes=electrolytes)
    return with_facts(
        campaign,
        pore_resistance_ohm_cm2=PORE,
        pore_electrolyte=campaign.readings.electrolyte[0],
        pore_temperature_K=298.15,
    )


@pytest.mark.parametrize(
    ("axis", "module", "truth"),
    [("concentration", concentration, 0.5), ("temperature", temperature, 50.0)],
)
def test_pores_halve_the_apparent_order_and_barrier(axis, module, truth):
    """R_ion >> R_ct: the mean of those of R_ct and of R_ion, here 0 (de Levie; Ogihara 2012)."""
    campaign = porous_campaign(np.random.default_rng(4))
    solved = module.estimate(campaign, Criteria(), porous=True)
    apparent = module.estimate(campaign, Criteria(), porous=False)
    (one,) = beside_apparent(axis, solved, apparent).estimates
    name = {"concentration": "order", "temperature": "Ea_kJ_mol"}[axis]
    assert getattr(one, name) == pytest.approx(truth, rel=0.1)
    assert one.apparent.value == pytest.approx(truth / 2, rel=0.12)
    assert one.apparent.ci is not None


def test_a_dense_electrode_has_nothing_beside_it():
    campaign = snapshot(simulate(np.random.default_rng(4)))
    (one,) = beside_apparent(
        "concentration",
        concentration.estimate(campaign, Criteria()),
        concentration.estimate(campaign, Criteria(), porous=False),
    ).estimates
    assert one.apparent is None
