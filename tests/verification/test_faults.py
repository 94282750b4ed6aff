"""Planted faults that keep the energy balance: each must break a published or exact check."""

from verification.faults import lost_circumference, noticed, shifted_window, swapped_conductivities
from verification.test_drink import check_level_that_falls
from verification.test_steady_section import (
    check_hollow_cylinder_wall_flux,
    check_orthotropic_hollow_cylinder,
)


def test_lost_circumference():
    with lost_circumference(), noticed():
        check_hollow_cylinder_wall_flux()


def test_swapped_conductivities():
    with swapped_conductivities(), noticed():
        check_orthotropic_hollow_cylinder()


def test_wetted_edge_off_by_one_facet():
    with shifted_window(-1.25e-3), noticed():
        check_level_that_falls()
