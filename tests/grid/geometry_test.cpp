#include "lagscape/grid/geometry.h"

#include <gtest/gtest.h>
#include <cmath>

namespace lagscape {
namespace {

Geometry small_grid(GeometryKind kind) {
  Geometry grid;
  grid.kind = kind;
  grid.rows = 2;
  grid.cols = 3;
  grid.y = {"y", "", "km", {45.25, 44.75}, {}, {}};
  grid.x = {"x", "", "km", {-3.75, -3.25, -2.75}, {}, {}};
  return grid;
}

TEST(Geometry, CellsOfALatLonGridAreNamedByRowColumnAndDegrees) {
  const Geometry grid = small_grid(GeometryKind::latlon);
  EXPECT_EQ(grid.describe_cell(5), "row 1, col 2 (lat 44.75, lon -2.75)");
  EXPECT_EQ(grid.describe(), "2 x 3 cells, lat 44.75 to 45.25, lon -3.75 to -2.75");
}

TEST(Geometry, ProjectedCellsAreNamedInTheirOwnUnits) {
  const Geometry grid = small_grid(GeometryKind::projected);
  EXPECT_EQ(grid.describe_cell(1), "row 0, col 1 (y 45.25 km, x -3.25 km)");
  EXPECT_EQ(grid.describe(), "2 x 3 cells, y 44.75 to 45.25 km, x -3.75 to -2.75 km");
}

TEST(Geometry, CurvilinearCellsAreNamedByTheirOwnDegrees) {
  Geometry grid = small_grid(GeometryKind::curvilinear);
  grid.lat = {1, 2, 3, 4, 5, 6.5};
  grid.lon = {10, 20, 30, 40, 50, NAN};
  EXPECT_EQ(grid.describe_cell(4), "row 1, col 1 (lat 5, lon 50)");
  EXPECT_EQ(grid.describe(), "2 x 3 cells, curvilinear, lat 1 to 6.5, lon 10 to 50");
}

TEST(Geometry, GridsWithoutCoordinatesAreNamedByIndexAlone) {
  const Geometry grid = small_grid(GeometryKind::index);
  EXPECT_EQ(grid.describe_cell(3), "row 1, col 0");
  EXPECT_EQ(grid.describe(), "2 x 3 cells without coordinates");
}

TEST(Geometry, SitesAreNamedByTheirNames) {
  Geometry sites;
  sites.kind = GeometryKind::sites;
  sites.rows = 1;
  sites.cols = 2;
  sites.site_names = {"Alder Weir", "Harrow Bridge"};
  EXPECT_EQ(sites.describe_cell(0), "site 'Alder Weir'");
  EXPECT_EQ(sites.describe(), "2 sites");
}

}  // namespace
}  // namespace lagscape
