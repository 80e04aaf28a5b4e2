"""Positions against PROJ (by pyproj), GeographicLib (pyproj's Geod) and the C library for MGRS.

The grid references were made with mgrs 1.6.0 (MIT; the GEOTRANS C code) and are frozen here.
"""

import numpy as np
import pyproj
import pytest

from analysis.orient.position import Position, average_fixes, from_mgrs, from_utm, to_mgrs, to_utm

MGRS = [
    (55.9533, -3.1883, "30UVH8824100898"),
    (60.39, 5.32, "32VKN9723000510"),  # the Norway exception: zone 32, not 31
    (78.2232, 15.6267, "33XWG1427883355"),  # Svalbard: zone 33
    (-25.78, 31.05, "36JUS0446247231"),
    (-17.0, -179.99999, "01KAB8054917998"),  # beside the date line
    (0.0, 0.0, "31NAA6602100000"),
    (-80.0, 10.0, "32CNS1938418247"),
    (83.9999999, 10.0, "33XVP4172130624"),
    (-54.8, -68.3, "19FEV4500027239"),
    (72.0, 0.0, "31XCV9656691508"),
    (-33.9, 18.4, "34HBH5958345888"),
    (56.0, 3.0, "32VJH2604922336"),
    (64.0, 2.999, "31WDL9995197014"),
    (71.99999, 9.0, "32WNE0000088931"),
]


def places():
    """Places all over the grid, with the edges of zones and bands."""
    rng = np.random.default_rng(3)
    spread = list(zip(rng.uniform(-80.0, 83.999, 250), rng.uniform(-180.0, 180.0, 250), strict=True))
    edges = [(latitude, longitude) for latitude in (-80.0, -8.0, 0.0, 8.0, 56.0, 72.0) for longitude in
             (-180.0, -179.999999, -6.0, 0.0, 3.0, 5.999999, 9.0, 33.0, 179.999999)]  # fmt: skip
    return [Position(*degrees) for degrees in spread + edges]


def proj(zone, *, north):
    """PROJ's UTM of a zone and hemisphere."""
    return pyproj.Proj(proj="utm", zone=zone, south=not north, ellps="WGS84")


@pytest.fixture(scope="module")
def compared():
    """Each place with our grid position and with PROJ's easting, northing and convergence."""
    rows = []
    for place in places():
        utm = to_utm(place)
        transform = proj(utm.zone, north=utm.is_north)
        easting, northing = transform(place.longitude_deg, place.latitude_deg)
        factors = transform.get_factors(place.longitude_deg, place.latitude_deg)
        rows.append((place, utm, easting, northing, factors.meridian_convergence))
    return rows


def test_eastings_and_northings_are_projs_to_a_millimetre(compared):
    """UTM positions equal PROJ's to 1 mm, over the whole grid and at the edges of its zones."""
    for place, utm, easting, northing, _ in compared:
        assert utm.easting_m == pytest.approx(easting, abs=1e-3), place
        assert utm.northing_m == pytest.approx(northing, abs=1e-3), place


def test_convergence_is_projs(compared):
    """Grid convergence equals PROJ's to a millionth of a degree."""
    for place, utm, _, _, convergence in compared:
        assert utm.convergence_deg == pytest.approx(convergence, abs=1e-6), place


def test_grid_positions_come_back_as_degrees(compared):
    """PROJ's easting and northing turn back into the latitude and longitude, to 1e-8 degrees."""
    for place, utm, easting, northing, _ in compared:
        back = from_utm(utm.zone, utm.is_north, easting, northing)
        across = (back.longitude_deg - place.longitude_deg + 180.0) % 360.0 - 180.0
        assert back.latitude_deg == pytest.approx(place.latitude_deg, abs=1e-8), place
        assert across == pytest.approx(0.0, abs=1e-8), place


@pytest.mark.parametrize("shift", [-1, 1])
def test_a_neighbouring_zone_serves_maps_near_its_edge(shift):
    """A position given in the next zone equals PROJ's in that zone to 1 mm."""
    for latitude, longitude in [(55.9533, -3.1883), (-25.78, 31.05), (45.0, 12.0)]:
        place = Position(latitude, longitude)
        zone = to_utm(place).zone + shift
        utm = to_utm(place, zone=zone)
        easting, northing = proj(zone, north=latitude > 0)(longitude, latitude)
        assert (utm.easting_m, utm.northing_m) == pytest.approx((easting, northing), abs=1e-3)


def test_convergence_is_the_azimuth_of_grid_north():
    """Walking 100 m along grid north goes off true north by the convergence, as GeographicLib measures it."""
    geod = pyproj.Geod(ellps="WGS84")
    for place in places()[:60]:
        utm = to_utm(place)
        if not 100.0 < utm.northing_m < 9_200_000.0:
            continue
        ahead = from_utm(utm.zone, utm.is_north, utm.easting_m, utm.northing_m + 100.0)
        azimuth, _, _ = geod.inv(
            place.longitude_deg, place.latitude_deg, ahead.longitude_deg, ahead.latitude_deg
        )
        assert azimuth == pytest.approx(utm.convergence_deg, abs=0.01)


@pytest.mark.parametrize(("latitude", "longitude", "reference"), MGRS)
def test_grid_references_are_the_c_librarys(latitude, longitude, reference):
    """Grid references equal the C library's, and lead back to within their square of a metre."""
    place = Position(latitude, longitude)
    assert to_mgrs(place) == reference
    # Half the diagonal of a square metre, and the sphere's share.
    assert from_mgrs(reference).distance_m(place) < 0.75


def test_distances_are_near_geographiclibs():
    """Distances on the sphere are within 0.7% of those on the ellipsoid, across the date line too."""
    geod = pyproj.Geod(ellps="WGS84")
    rng = np.random.default_rng(17)
    for latitude, longitude in rng.uniform((-85.0, -180.0), (85.0, 180.0), (60, 2)):
        for metres in (5.0, 800.0, 40_000.0, 3_000_000.0):
            far_lon, far_lat, _ = geod.fwd(longitude, latitude, rng.uniform(0.0, 360.0), metres)
            distance = Position(latitude, longitude).distance_m(Position(far_lat, far_lon))
            assert distance == pytest.approx(metres, rel=0.007)


def test_an_average_lies_where_its_fixes_do():
    """Fixes on a circle of 20 m about a place average to the place, and their spread is 20 m."""
    geod = pyproj.Geod(ellps="WGS84")
    for latitude, longitude in [(56.0, -3.0), (-17.0, 179.99999), (0.0, 0.0), (80.0, -180.0)]:
        around = [geod.fwd(longitude, latitude, azimuth, 20.0)[:2] for azimuth in range(0, 360, 30)]
        mean = average_fixes([Position(lat, lon, 100.0, 5.0) for lon, lat in around])
        assert mean.position.distance_m(Position(latitude, longitude)) < 0.02
        assert mean.spread_m == pytest.approx(20.0, rel=0.007)
