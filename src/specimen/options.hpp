// The words of specimen options, and whether a model can take them.
#pragma once

#include "specimen/specimen.hpp"

namespace stanchion::specimen {

/// Bad usage when `unknowns` or an option is out of range, or the model does not know the fault.
Status check_options(const SpecimenEntry& entry, Offset unknowns, const SpecimenOptions& options);

/// The word of a fault, as on the command line.
const char* fault_word(Fault fault);

}  // namespace stanchion::specimen
