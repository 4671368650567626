// The node cloud as SVG, seen along the direction that shows a motion best.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "report/model_reduction.hpp"
#include "report/projection.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

/// What a drawing points at.
struct Mark {
  std::size_t node = 0;  ///< index in the picture
  std::string text;
};

struct ModelDrawing {
  std::string overview, close_up;  ///< two SVG elements; empty when there is nothing to draw
  double exaggeration = 0;         ///< drawn length of the largest motion over the model's size
  ViewAxes view;
  std::size_t drawn = 0, left_out = 0;  ///< nodes of the cloud that were drawn and thinned out
  std::size_t without_number = 0;       ///< nodes of the close-up whose numbers have no room
};

/// A model thinned to what a page shows (reduce_model), for the overview of a large one.
struct CoarseModel {
  Picture picture;
  std::vector<std::array<float, 3>> shape;
  std::vector<Mark> marks;
};

/// The nodes and links that stand for the whole, with a motion and marks on them; marks on nodes that were
/// left out are left out, too.
CoarseModel coarse_model(const LocateOutcome& located, const ReducedModel& reduced,
                         const std::vector<std::array<float, 3>>& shape, const std::vector<Mark>& marks);

/// Overview of the whole model with the motion in a second colour, and a close-up on the first mark. Colours
/// come from the page's style (classes v-...). A million nodes are thinned to one a few pixels; with `coarse`
/// the overview shows that instead, the close-up the model itself.
ModelDrawing draw_model(const Picture& picture, const std::vector<std::array<float, 3>>& shape,
                        const std::vector<Mark>& marks, const CoarseModel* coarse = nullptr);

/// Size of a dot of the field, over the usual one, by its step 0 to 5.
double field_dot(int step);

/// The cloud coloured by a value of each node (classes v-0 to v-5 for six steps from 0 to `top`); empty
/// without nodes.
std::string draw_field(const Picture& picture, const std::vector<float>& value, double top);

}  // namespace stanchion
