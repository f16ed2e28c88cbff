"""campaign add"""

from __future__ import annotations

from typing import Annotated

import typer

from campaign.cli.options import By, Db, Json

app = typer.Typer(
    help='Add an electrode, electrolyte, cell or species.\n\n'
    'Example: campaign add electrode "NVP film A" --ion Na --diffusion-length-um 0.4',
    rich_markup_mode=None,
    no_args_is_help=True,
)


def _text(option: str, help_text: str, metavar: str = "TEXT") -> typer.models.OptionInfo:
    made: typer.models.OptionInfo = typer.Option(option, metavar=metavar, help=help_text)
    return made


def _done(kind: str, label: str, json: bool, warnings: tuple[str, ...] = ()) -> None:
    from campaign.present.refusals import note

    for warning in warnings:
        note(f"Note: {warning}")
    if json:
        from campaign.present.tables import show_json

        show_json({"added": {kind: label}, "warnings": list(warnings)})
    else:
        print(f"Added {kind} {label}.")


@app.command("electrode")
def electrode(
    label: Annotated[str, typer.Argument(help="A label not in use.")],
    ion: Annotated[str, _text("--ion", "Insertion ion, such as Na or Mg2+.", "ION")],
    material: Annotated[str | None, _text("--material", "Active material.")] = None,
    form: Annotated[str | None, _text("--form", "Thin film, composite, pellet ...")] = None,
    diffusion_length_um: Annotated[
        str | None, _text("--diffusion-length-um", "Film thickness or particle radius.", "UM")
    ] = None,
    diffusivity_cm2_s: Annotated[
        str | None, _text("--diffusivity-cm2-s", "Diffusivity of the ion in the host.", "D")
    ] = None,
    porosity: Annotated[str | None, _text("--porosity", "Pore fraction, 0 to 1.", "X")] = None,
    pore_resistance_ohm_cm2: Annotated[
        str | None, _text("--pore-resistance-ohm-cm2", "Pore ionic resistance.", "R")
    ] = None,
    pore_electrolyte: Annotated[
        str | None, _text("--pore-electrolyte", "Electrolyte it was measured in.", "RECIPE")
    ] = None,
    pore_temperature_C: Annotated[
        str | None, _text("--pore-temperature-C", "Temperature it was measured at.", "T")
    ] = None,
    window_low_V: Annotated[
        str | None, _text("--window-low-V", "Lowest potential allowed.", "E")
    ] = None,
    window_high_V: Annotated[
        str | None, _text("--window-high-V", "Highest potential allowed.", "E")
    ] = None,
    window_reference: Annotated[
        str | None, _text("--window-reference", "Scale of window and plateaus.", "REF")
    ] = None,
    maximum_temperature_C: Annotated[
        str | None, _text("--maximum-temperature-C", "Highest temperature allowed.", "T")
    ] = None,
    plateau: Annotated[
        list[str] | None,
        _text("--plateau", "Two-phase plateau; may be repeated.", "LOW:HIGH:REF"),
    ] = None,
    note: Annotated[str | None, _text("--note", "Anything worth keeping.")] = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Add an electrode: one active material in one form.

    Example: campaign add electrode "NVP film A" --ion Na --plateau 3.36:3.40:Na/Na+
    """
    stated = dict(locals())
    for name in ("label", "ion", "plateau", "by", "db", "json"):
        stated.pop(name)
    from campaign.ledger.adding import add_electrode
    from campaign.ledger.database import open_database

    made = add_electrode(open_database(db), label, ion, stated, plateau or (), by)
    _done("electrode", made, json)


@app.command("electrolyte")
def electrolyte(
    recipe: Annotated[str, typer.Argument(help="As papers write it.")],
    aqueous: Annotated[
        str | None, _text("--aqueous", "yes or no; else from the solvents.", "YES-NO")
    ] = None,
    density_g_cm3: Annotated[str | None, _text("--density-g-cm3", "Density.", "X")] = None,
    minimum_temperature_C: Annotated[
        str | None, _text("--minimum-temperature-C", "Lowest temperature allowed.", "T")
    ] = None,
    maximum_temperature_C: Annotated[
        str | None, _text("--maximum-temperature-C", "Highest temperature allowed.", "T")
    ] = None,
    conductivity: Annotated[
        list[str] | None,
        _text("--conductivity-mS-cm", "Conductivity; may be repeated.", "T:VALUE"),
    ] = None,
    activity: Annotated[
        list[str] | None,
        _text("--activity-coefficient", "Mean activity coefficient; may be repeated.", "T:VALUE"),
    ] = None,
    note: Annotated[str | None, _text("--note", "Anything worth keeping.")] = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Add an electrolyte by its recipe, and show the usual cautions.

    Example: campaign add electrolyte "1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC"
    """
    stated = {
        "aqueous": aqueous,
        "density_g_cm3": density_g_cm3,
        "minimum_temperature_C": minimum_temperature_C,
        "maximum_temperature_C": maximum_temperature_C,
        "note": note,
    }
    from campaign.ledger.adding import add_electrolyte
    from campaign.ledger.database import open_database
    from campaign.present.records import show_cautions

    key, warnings = add_electrolyte(
        open_database(db), recipe, stated, conductivity or (), activity or (), by
    )
    _done("electrolyte", key, json, warnings)
    if not json:
        show_cautions([key])


@app.command("cell")
def cell(
    label: Annotated[str, typer.Argument(help="A label not in use.")],
    electrode: Annotated[str, _text("--electrode", "Its electrode.", "LABEL")],
    electrolyte: Annotated[str, _text("--electrolyte", "Its electrolyte.", "RECIPE")],
    area_cm2: Annotated[str, _text("--area-cm2", "Geometric area.", "A")],
    specimen: Annotated[
        str | None, _text("--specimen", "The physical piece, if moved between cells.", "LABEL")
    ] = None,
    configuration: Annotated[
        str | None,
        _text("--configuration", "three-electrode, two-electrode or symmetric.", "WORD"),
    ] = None,
    reference: Annotated[str | None, _text("--reference", "Such as Na/Na+.", "REF")] = None,
    assembled_at: Annotated[
        str | None, _text("--assembled-at", "When it was assembled.", "TIME")
    ] = None,
    operator: Annotated[str | None, _text("--operator", "Who assembled it.")] = None,
    note: Annotated[str | None, _text("--note", "Anything worth keeping.")] = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Add a cell before its first measurement.

    Example: campaign add cell C07 --electrode "NVP film A" --electrolyte "1 M NaPF6 in PC"
    --area-cm2 1.13 --reference Na/Na+
    """
    stated = dict(locals())
    for name in ("by", "db", "json"):
        stated.pop(name)
    from campaign.ledger.adding import add_cell
    from campaign.ledger.database import open_database

    _done("cell", add_cell(open_database(db), stated, by), json)


@app.command("species")
def species(
    name: Annotated[str, typer.Argument(help="As it is written in recipes.")],
    classes: Annotated[
        list[str], _text("--class", "salt, solvent or additive; may be repeated.", "WORD")
    ],
    source: Annotated[str, _text("--source", "Where its values are from.")],
    formula: Annotated[str | None, _text("--formula", "Formula.")] = None,
    cation: Annotated[str | None, _text("--cation", "Cation of a salt.", "ION")] = None,
    cations: Annotated[int, typer.Option("--cations", min=1, max=9)] = 1,
    molar_mass: Annotated[float | None, typer.Option("--molar-mass", min=1, max=5000)] = None,
    donor_number: Annotated[
        float | None, typer.Option("--donor-number", min=0, max=100, help="kcal/mol.")
    ] = None,
    permittivity: Annotated[float | None, typer.Option("--permittivity", min=1, max=1000)] = None,
    flash_point: Annotated[
        float | None, typer.Option("--flash-point-C", min=-100, max=500)
    ] = None,
    caution: Annotated[str | None, _text("--caution", "What to be careful of.")] = None,
    by: By = None,
    db: Db = None,
    json: Json = False,
) -> None:
    """Add a salt, solvent or additive that the shipped table lacks.

    Example: campaign add species HFE-7 --class solvent --flash-point-C 60 --source "data sheet"
    """
    from campaign.ledger.adding import add_species
    from campaign.ledger.database import open_database

    stated = {
        "formula": formula,
        "cation": cation,
        "cations": cations if cation else None,
        "molar_mass": molar_mass,
        "donor_number": donor_number,
        "permittivity": permittivity,
        "flash_point_C": flash_point,
        "caution": caution,
        "source": source,
    }
    _done("species", add_species(open_database(db), name, classes, stated, by), json)
