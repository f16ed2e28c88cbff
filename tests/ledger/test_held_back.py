"""What is refused because something else would lose its meaning."""

import pytest

from campaign.errors import Refused
from campaign.ledger.adding import add_electrode, add_electrolyte
from campaign.ledger.amending import amend
from campaign.ledger.database import open_database
from campaign.ledger.demonstration import build
from campaign.ledger.files import read_files
from campaign.ledger.filters import read_filter
from campaign.ledger.importing import import_tables
from campaign.ledger.starting import start
from campaign.ledger.withdrawing import withdraw


@pytest.fixture
def database(tmp_path):
    start(str(tmp_path / "campaign.sqlite"), "Europe/Paris")
    return open_database(str(tmp_path / "campaign.sqlite"))


def test_a_cell_with_unstated_potentials_stays_symmetric(database, tmp_path):
    table = tmp_path / "t.csv"
    table.write_text(
        "electrode,ion,cell,area_cm2,configuration,electrolyte,measured_at,temperature_C,R_ct\n"
        "film,Na,C1,1.1,symmetric,1 M NaPF6 in PC,2026-03-01T10:00Z,25,41\n"
    )
    import_tables(database, read_files(database, [str(table)]))
    with pytest.raises(Refused, match="without a potential"):
        amend(database, "cell", "C1", {"configuration": "three-electrode"})
    amend(database, "measurement", "1", {"potential_V": "0"})
    amend(database, "cell", "C1", {"configuration": "three-electrode"})


def test_the_electrolyte_of_a_pore_resistance_is_held(database):
    add_electrolyte(database, "1 M NaPF6 in PC", {})
    stated = {"pore_resistance_ohm_cm2": "12", "pore_electrolyte": "1 M NaPF6 in PC"}
    add_electrode(database, "composite", "Na", stated)
    with pytest.raises(Refused, match="1 electrode stands on this electrolyte"):
        withdraw(database, "electrolyte", "1 M NaPF6 in PC")


def test_the_demo_leaves_another_campaign_alone(database, tmp_path):
    with pytest.raises(Refused, match="a campaign of yours"):
        build(tmp_path)


@pytest.mark.parametrize("text", ["2026-03-01", "2026-3-1"])
def test_a_day_ends_at_its_end_in_the_campaigns_zone(database, text):
    with database.reading() as connection:
        assert read_filter(connection, until=text).until == "2026-03-01T22:59:59.999999Z"
        assert read_filter(connection, since=text).since == "2026-02-28T23:00:00.000000Z"
        with pytest.raises(Refused, match="--until is '03/04/2026'"):
            read_filter(connection, until="03/04/2026")
