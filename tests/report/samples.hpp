// Hand-made outcomes, one for each shape that a document can take.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion::samples {

Outcome definite();           ///< proved, two matrices added
Outcome semidefinite();       ///< six zero directions, a warning, equations struck out
Outcome indefinite();         ///< statistical, from the relative test
Outcome unresolved();         ///< nothing certified
Outcome constrained();        ///< multipliers, rank known
Outcome constrained_range();  ///< multipliers, only a range known
Outcome counted();            ///< three shifts of K + f G, all certified
Outcome counted_in_part();    ///< one shift without certificate
Outcome forecast();

Outcome located();              ///< locate: a loose part, a negative spring, an unresolved rest; mass
Outcome nothing_located();      ///< check --locate of a definite matrix, with local accuracy
Outcome location_unresolved();  ///< locate where nothing is certified

std::vector<std::pair<std::string, Outcome>> all();

}  // namespace stanchion::samples
