"""``supplycheck pipe``: one pipe, of which loss, flow, diameter or pump is to be found."""

from __future__ import annotations

from typing import Any

import click

HELP = """Solve one pipe: pressure loss, flow, diameter or pump.

Leave out what is to be found. With --flow and --diameter (or --material and --size) it is the loss;
with --loss or the pressures at both ends it is whichever of --flow and --diameter is missing; with flow,
diameter and both ends it is the pump.

A number without a unit is in the unit set of --units; any number may carry its own: "6 L/s", "80 psi",
"10'-6\\"", "1 1/4 in". A loss or a pump may be given as a head of the fluid: "20 m".

\b
supplycheck pipe --flow 100 --diameter 2.067 --length 50 --c-factor 120
supplycheck pipe --flow "6 L/s" --diameter "50 mm" --length "60 m" --roughness "0.002 mm" \\
    --temperature "15 °C" --units metric
supplycheck pipe --flow 250 --loss 10 --length 200 --material "steel schedule 40" --system wet

Exit codes: 0 solved, 2 wrong usage, 4 no solution.
"""

_LAWS = ("hazen-williams", "darcy-weisbach")


def _option(name: str, text: str, metavar: str = "NUMBER") -> Any:
    return click.option(name, metavar=metavar, help=text)


_OPTIONS = (
    _option("--flow", "Flow (gpm, L/min)."),
    _option("--diameter", "Inside diameter (in, mm)."),
    _option("--material", 'Kind of pipe in the catalogue, as in "steel schedule 40".', "NAME"),
    _option("--size", "Nominal size of that material, in place of --diameter.", "SIZE"),
    _option("--system", "Kind of system (wet, dry …), with which the catalogue gives C.", "NAME"),
    _option("--loss", "Friction and minor loss together (psi, bar; or a head)."),
    _option("--start-pressure", "Gauge pressure at the start (psi, bar)."),
    _option("--end-pressure", "Gauge pressure at the end (psi, bar)."),
    _option("--length", "Length of the pipe (ft, m)."),
    click.option(
        "--law",
        type=click.Choice(_LAWS),
        help="Friction law. Default: the one whose C-factor or roughness is given.",
    ),
    click.option(
        "--form",
        type=click.Choice(("us", "metric", "head")),
        help="Form of Hazen-Williams: 4.52 (us), 6.05e5 (metric), 10.67 (head). Default: by --units.",
    ),
    _option("--c-factor", "C of Hazen-Williams, 120 for instance."),
    _option("--roughness", "Absolute roughness for Darcy-Weisbach (ft, mm)."),
    _option("--friction-factor", "A given Darcy friction factor in place of a roughness."),
    _option("--minor-k", "Sum of the loss coefficients K of fittings, entrance and exit."),
    _option(
        "--fittings", 'Fittings of that --size, "2 elbow 90; 1 tee"; lengths from the catalogue.', "LIST"
    ),
    _option("--equivalent-length", "Equivalent length of fittings, corrected for C and bore (ft, m)."),
    _option("--rise", "Elevation of the end above the start, may be negative (ft, m)."),
    click.option("--from-reservoir", is_flag=True, help="The start is still water, at 0 unless given."),
    click.option("--to-reservoir", is_flag=True, help="The end is still water, at 0 unless given."),
    click.option("--jet", is_flag=True, help="The end is a free jet: pressure 0, full velocity."),
    _option("--pump-head", "Head of a pump in the pipe (ft, m; or a pressure)."),
    _option("--pump-power", "Shaft power of a pump in the pipe (hp, kW)."),
    _option("--efficiency", "Efficiency of the pump, 0.7 or 70 %."),
    _option("--temperature", "Water at this temperature (°F, °C)."),
    _option("--density", "Density of another fluid (lb/ft³, kg/m³)."),
    _option("--viscosity", "Dynamic viscosity of another fluid (cP)."),
    click.option(
        "--units",
        type=click.Choice(("us", "metric")),
        default="us",
        show_default=True,
        help="Units of the answer and of numbers that carry none.",
    ),
    click.option("--steps", is_flag=True, help="Print every trial of the search."),
    click.option("--json", "as_json", is_flag=True, help="Print the answer as JSON."),
)


def _with_options(function: Any) -> Any:
    for option in reversed(_OPTIONS):
        function = option(function)
    return function


@click.command("pipe", help=HELP)
@_with_options
def command(**options: Any) -> None:
    """Read the options, solve, print."""
    from supplycheck.commands import pipe_answer, pipe_question
    from supplycheck.errors import DomainError, NoSolutionError
    from supplycheck.hydraulics import solve_one_pipe

    if all(options[name] is None for name in ("length", "minor_k", "equivalent_length", "fittings")):
        raise click.UsageError("give at least --length; see --help for examples")
    try:
        question = pipe_question.ask(options)
    except DomainError as error:
        raise click.UsageError(str(error)) from None
    try:
        result = solve_one_pipe(question.problem)
        next_size = pipe_question.next_size(question, result)
    except DomainError as error:
        raise click.UsageError(str(error)) from None
    except NoSolutionError as error:
        if options["as_json"]:
            click.echo(pipe_answer.no_solution_json(question, str(error)))
        click.echo(pipe_answer.no_solution_text(question, str(error)), err=True)
        raise click.exceptions.Exit(4) from None
    if options["as_json"]:
        click.echo(pipe_answer.as_json(question, result, next_size))
    else:
        click.echo(pipe_answer.as_text(question, result, next_size, steps=options["steps"]))
