"""Published tables: pipe, fittings, hazard classes, hydrants, pumps, rules; SI rows that name their source.

Modules and tables are loaded when first asked for. Names are forgiving about case, order of words and
punctuation; an unknown one raises :class:`supplycheck.errors.NotInCatalogueError` with near matches.
"""

from importlib import import_module
from types import MappingProxyType
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from supplycheck.catalogue.fittings import (
        c_multipliers,
        equivalent_length,
        fitting_aliases,
        fitting_name,
        fitting_names,
    )
    from supplycheck.catalogue.hazards import (
        DensityPoint,
        EsfrRow,
        HazardRow,
        KFactorPair,
        esfr,
        hazard_class,
        hazard_names,
        k_factors,
    )
    from supplycheck.catalogue.names import (
        fold,
        normalise_nominal,
    )
    from supplycheck.catalogue.pipes import (
        bores,
        c_factor,
        find_bore,
        in_dn,
        in_inches,
        materials,
        next_larger,
        roughness,
    )
    from supplycheck.catalogue.records import (
        BoreRow,
        CFactorRow,
        ExtraRows,
        FittingRow,
        MaterialRow,
        ValueRow,
    )
    from supplycheck.catalogue.rules import (
        MarginShape,
        margin_shapes,
        rule,
        rule_names,
    )
    from supplycheck.catalogue.water import (
        FireFlowRow,
        FluidRow,
        HydrantClassRow,
        HydrantSpacingRow,
        PumpDutyRow,
        ReductionRow,
        antifreeze,
        construction_types,
        fire_flow,
        fire_flow_reduction,
        hydrant_class,
        hydrant_classes,
        hydrant_spacing,
        outlet_coefficient,
        outlet_shapes,
        pump_duties,
        pump_ratings,
        pumper_factor,
    )

__all__ = [
    "BoreRow",
    "CFactorRow",
    "DensityPoint",
    "EsfrRow",
    "ExtraRows",
    "FireFlowRow",
    "FittingRow",
    "FluidRow",
    "HazardRow",
    "HydrantClassRow",
    "HydrantSpacingRow",
    "KFactorPair",
    "MarginShape",
    "MaterialRow",
    "PumpDutyRow",
    "ReductionRow",
    "ValueRow",
    "antifreeze",
    "bores",
    "c_factor",
    "c_multipliers",
    "construction_types",
    "equivalent_length",
    "esfr",
    "find_bore",
    "fire_flow",
    "fire_flow_reduction",
    "fitting_aliases",
    "fitting_name",
    "fitting_names",
    "fold",
    "hazard_class",
    "hazard_names",
    "hydrant_class",
    "hydrant_classes",
    "hydrant_spacing",
    "in_dn",
    "in_inches",
    "k_factors",
    "margin_shapes",
    "materials",
    "next_larger",
    "normalise_nominal",
    "outlet_coefficient",
    "outlet_shapes",
    "pump_duties",
    "pump_ratings",
    "pumper_factor",
    "roughness",
    "rule",
    "rule_names",
]

_HOMES: Final = MappingProxyType(
    {
        "fittings": "c_multipliers equivalent_length fitting_aliases fitting_name fitting_names",
        "hazards": "DensityPoint EsfrRow HazardRow KFactorPair esfr hazard_class hazard_names k_factors",
        "names": "fold normalise_nominal",
        "pipes": "bores c_factor find_bore in_dn in_inches materials next_larger roughness",
        "records": "ValueRow BoreRow MaterialRow CFactorRow FittingRow ExtraRows",
        "rules": "MarginShape margin_shapes rule rule_names",
        "water": (
            "FireFlowRow FluidRow HydrantClassRow HydrantSpacingRow PumpDutyRow ReductionRow antifreeze "
            "construction_types fire_flow fire_flow_reduction hydrant_class hydrant_classes "
            "hydrant_spacing outlet_coefficient outlet_shapes pump_duties pump_ratings pumper_factor"
        ),
    }
)


def __getattr__(name: str) -> object:
    for home, names in _HOMES.items():
        if name in names.split():
            value: object = getattr(import_module(f"{__name__}.{home}"), name)
            globals()[name] = value
            return value
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
