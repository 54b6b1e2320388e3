"""Hand-made models for tests downstream of the fit. All numbers are invented."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from behavgen.model import (
    ApertureEffect,
    Axis,
    Box,
    Cell,
    ComparatorModel,
    Condition,
    ConditionFit,
    CurvePoints,
    DelayEffect,
    EnergyEffect,
    Estimate,
    KickbackEffect,
    MemoryEffect,
    MemoryTerm,
    MismatchEffect,
    NoiseEffect,
    OffsetEffect,
    Parameter,
    Pins,
    Process,
    Range,
    ResetEffect,
    Source,
    Surface,
    Variant,
)

BOX = Box(
    vdd_v=Range(low=1.08, high=1.32),
    temperature_k=Range(low=233.15, high=398.15),
    vcm_v=Range(low=0.5, high=0.8),
    overdrive_v=Range(low=1e-6, high=0.3),
)
SLOW_BOX = Box(
    vdd_v=Range(low=1.2, high=1.2),
    temperature_k=Range(low=300.15, high=300.15),
    vcm_v=Range(low=0.6, high=0.7),
    overdrive_v=Range(low=1e-6, high=0.3),
)
AXES = (
    Axis(condition="temperature_k", shape="reciprocal", centre=0.0034, half_range=0.00089),
    Axis(condition="vdd_v", shape="plain", centre=1.2, half_range=0.12),
    Axis(condition="vcm_v", shape="reciprocal_square", centre=2.78, half_range=1.22),
)
EXPONENTS = ((0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1), (1, 1, 0), (0, 0, 2), (0, 2, 1))


def full_surface(
    unit: str, transform: str, first: tuple[float, ...], slow_shift: float = 0.0
) -> Surface:
    """Return a surface over all axes for the processes typ and slow."""
    slow = (first[0] + slow_shift, *first[1:])
    return Surface(
        unit=unit, transform=transform, axes=AXES, exponents=EXPONENTS,
        variants=(
            Variant(process="typ", coefficients=first, box=BOX),
            Variant(process="slow", coefficients=slow, box=SLOW_BOX, scaled_from="typ"),
        ),
    )  # fmt: skip


def constant_surface(unit: str, transform: str, value: float, *processes: str) -> Surface:
    """Return a surface that depends on nothing; `value` is the coefficient."""
    return Surface(
        unit=unit, transform=transform, axes=(), exponents=((),),
        variants=tuple(
            Variant(process=name, coefficients=(value,), box=Box()) for name in processes
        ),
    )  # fmt: skip


def full_model(**cell: object) -> ComparatorModel:
    """Return a model with every effect; keywords change the cell's settings."""
    node_v = (1e-3, 5e-3, 3e-2, 0.3)
    node_s = (250e-12, 190e-12, 130e-12, 60e-12)
    nodes = tuple(
        full_surface("s", "log", (round(float(np.log(s)), 6), 0.05, -0.3, 0.1, 0.02, 0.03, 0.01),
                     0.15)
        for s in node_s
    )  # fmt: skip
    points = (
        CurvePoints(
            quantity="delay",
            condition=Condition(process="typ", vdd_v=1.2, temperature_k=300.15, vcm_v=0.65),
            x=(1e-5, 1e-3, 1e-1), y=(3.4e-10, 2.5e-10, 1e-10),
        ),
        CurvePoints(
            quantity="noise",
            condition=Condition(vdd_v=1.2, temperature_k=300.15, vcm_v=0.65),
            x=(-1e-3, 0.0, 1e-3, 2e-3), y=(0.01, 0.1, 0.52, 0.97), trials=(200, 200, 200, 200),
        ),
        CurvePoints(
            quantity="window",
            condition=Condition(vdd_v=1.2, temperature_k=300.15, vcm_v=0.65),
            x=(3e-10, 4e-10), y=(2.4e-4, 1.5e-6),
        ),
        CurvePoints(
            quantity="offset",
            condition=Condition(vdd_v=1.2, temperature_k=300.15, vcm_v=0.65),
            x=(1.0, 2.0, 3.0), y=(1e-3, -6e-3, 4e-3),
        ),
    )  # fmt: skip
    tau = Parameter(
        name="tau_s", estimate=Estimate(value=20e-12, low=19.8e-12, high=20.3e-12), unit="s",
        low=0.0, description="regeneration time constant", source="delay.csv",
    )  # fmt: skip
    return ComparatorModel(
        cell=Cell(name="latch_full", description="invented example with every effect",
                  supply_off_v=0.54, **cell),
        processes=(Process(name="typ", code=0), Process(name="slow", code=3)),
        box=BOX,
        offset=OffsetEffect(
            surface=full_surface("V", "plain", (1e-3, 1e-4, -2e-4, 3e-4, 5e-5, -4e-5, 2e-5), 4e-4),
            source="trip points of the S-curves",
        ),
        mismatch=MismatchEffect(
            components=(
                full_surface("V", "plain", (6e-3, 2e-4, -1e-4, 3e-4, 0.0, 0.0, 0.0)),
                constant_surface("V", "plain", 8e-4, "typ", "slow"),
            ),
            instances=60,
        ),
        noise=NoiseEffect(
            surface=full_surface("V", "log", (-7.6, 0.1, -0.05, 0.2, 0.0, 0.03, 0.0), 0.05)
        ),
        delay=DelayEffect(
            tau=full_surface("s", "log", (-24.635, 0.04, -0.35, 0.1, 0.03, 0.02, 0.01), 0.12),
            node_overdrive_v=node_v, nodes=nodes, law="nodes",
            measured="clk 50 % to outp-outn at half supply",
        ),
        reset=ResetEffect(
            surface=full_surface("s", "log", (-24.41, 0.05, -0.2, 0.0, 0.0, 0.0, 0.0), 0.1)
        ),
        parameters=(tau,),
        fits=(
            ConditionFit(quantity="delay", condition=points[0].condition, rows=3,
                         rms_relative=0.004, worst_relative=0.009, parameters=(tau,)),
        ),
        points=points,
        notices=("The noise table covers 1 of 1 conditions.",),
        sources=(
            Source(quantity="delay", file="delay.csv", sha256="0" * 64, rows=3),
            Source(quantity="noise", file="noise.csv", sha256="1" * 64, rows=4),
        ),
        generator="behavgen 0.1.0",
    )  # fmt: skip


def complete_model(**cell: object) -> ComparatorModel:
    """Return the full model with memory, aperture, energy and kickback besides."""
    model = full_model(**cell)
    here = Condition(vdd_v=1.2, temperature_k=300.15, vcm_v=0.65)
    points = (
        CurvePoints(quantity="memory", condition=here, x=(9e-11, 1.5e-10, 3e-10),
                    y=(3.4e-3, 1.4e-3, 6e-4)),
        CurvePoints(quantity="memory_at_least", condition=here, x=(4e-11,), y=(6e-3,)),
        CurvePoints(quantity="aperture", condition=here,
                    x=(0.0, 1e-11, 2e-11, 3e-11, 4e-11), y=(1.0, 0.9, 0.55, 0.1, 0.0)),
        CurvePoints(quantity="energy", condition=here, x=(1e-5, 1e-3, 1e-1),
                    y=(7.4e-14, 6.5e-14, 5e-14)),
        CurvePoints(quantity="kickback_common", condition=here, x=(1e-3, 1e-1),
                    y=(2.1e-15, 2.1e-15)),
        CurvePoints(quantity="kickback_differential", condition=here, x=(1e-3, 1e-1),
                    y=(-1e-17, -3e-16)),
    )  # fmt: skip
    return replace(
        model,
        cell=replace(model.cell, name="latch_complete"),
        memory=MemoryEffect(
            terms=(
                MemoryTerm(
                    shift=full_surface("V", "log", (-3.6, 0.2, 0.1, 0.0, 0.05, 0.0, 0.0), 0.1),
                    tau=full_surface("s", "log", (-24.4, 0.05, -0.1, 0.02, 0.0, 0.0, 0.0), 0.05),
                ),
                MemoryTerm(
                    shift=constant_surface("V", "log", -5.8, "typ", "slow"),
                    tau=constant_surface("s", "log", -23.1, "typ", "slow"),
                ),
            ),
            floor=constant_surface("V", "log", -8.1, "typ", "slow"),
            cap_v=0.012,
        ),
        aperture=ApertureEffect(
            centre=full_surface("s", "plain", (2e-11, 1e-12, -2e-12, 0.0, 0.0, 0.0, 0.0), 4e-12),
            width=constant_surface("s", "log", -24.7, "typ", "slow"),
        ),
        energy=EnergyEffect(
            law="delay",
            fixed=full_surface("J", "log", (-30.8, 0.02, 0.2, 0.03, 0.0, 0.0, 0.0), 0.02),
            rise=full_surface("W", "log", (-9.2, -0.3, 0.4, 0.0, 0.0, 0.0, 0.0)),
            cycle_time_s=2e-9,
        ),
        kickback=KickbackEffect(
            common=constant_surface("C", "plain", 2.1e-15, "typ", "slow"),
            differential=constant_surface("C", "plain", -7e-18, "typ", "slow"),
            differential_per_v=constant_surface("C/V", "plain", -2.9e-15, "typ", "slow"),
        ),
        points=(*model.points, *points),
    )


def with_energy(law: str) -> ComparatorModel:
    """Return the complete model with another law of the energy."""
    model = complete_model()
    assert model.energy is not None
    rise = constant_surface("J", "log", -33.5, "typ", "slow")
    changes = {
        "constant": {"rise": None},
        "overdrive": {"rise": rise, "overdrive_v": Range(low=1e-5, high=0.1)},
    }
    return replace(model, energy=replace(model.energy, law=law, **changes.get(law, {})))


def minimal_model(**cell: object) -> ComparatorModel:
    """Return a model of one process with nothing but a two-parameter delay law."""
    return ComparatorModel(
        cell=Cell(name="latch_minimal", description="invented example with a delay only", **cell),
        processes=(Process(name="nominal", code=0),),
        box=Box(overdrive_v=Range(low=1e-6, high=0.5)),
        delay=DelayEffect(
            tau=constant_surface("s", "log", -25.328436, "nominal"),
            node_overdrive_v=(0.5,),
            nodes=(constant_surface("s", "log", -24.412145, "nominal"),),
            law="logarithmic", measured="clk 50 % to outp-outn at half supply",
        ),
        generator="behavgen 0.1.0",
    )  # fmt: skip


def noisy_model() -> ComparatorModel:
    """Return a fast model of one process: a delay, and everything that is random."""
    model = minimal_model()
    return replace(
        model,
        cell=replace(model.cell, name="latch_noisy", description="invented example of noise",
                     pins=replace(model.cell.pins, vdd=None)),
        offset=OffsetEffect(
            surface=constant_surface("V", "plain", 1.3e-3, "nominal"),
            source="trip points of the S-curves",
        ),
        noise=NoiseEffect(surface=constant_surface("V", "log", -7.6, "nominal")),
        mismatch=MismatchEffect(
            components=(constant_surface("V", "plain", 4e-3, "nominal"),), instances=60
        ),
    )  # fmt: skip


def renamed_pins_model(**cell: object) -> ComparatorModel:
    """Return the full model with renamed pins, an enable and without supply or outn pins."""
    pins = Pins(inp="vip", inn="vim", clk="ck", outp="q", outn=None, vdd=None, enable="en")
    model = full_model(**cell)
    return replace(model, cell=replace(model.cell, name="latch_renamed", pins=pins))
