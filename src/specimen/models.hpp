// The models behind make_specimen, one function and one file each. All follow the contract of make_specimen.
#pragma once

#include "specimen/specimen.hpp"

namespace stanchion::specimen {

Result<Specimen> make_solid(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_plate(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_cylinder(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_frame(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_column(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_saddle(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_lattice(Offset unknowns, const SpecimenOptions& options);
Result<Specimen> make_laplace(Offset unknowns, const SpecimenOptions& options);

}  // namespace stanchion::specimen
