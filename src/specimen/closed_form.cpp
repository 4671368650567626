#include "specimen/closed_form.hpp"

#include <algorithm>

namespace stanchion::specimen {

std::vector<ExpectedCount> counts_in_gaps(Pencil pencil, std::vector<SpectrumValue>& spectrum, double gap,
                                          std::size_t most, const std::string& why) {
  std::sort(spectrum.begin(), spectrum.end(),
            [](const SpectrumValue& a, const SpectrumValue& b) { return a.value < b.value; });
  std::vector<ExpectedCount> counts;
  if (!spectrum.empty() && spectrum.front().value > 0) {
    counts.push_back({pencil, spectrum.front().value / 2, 0, why});
  }
  double reach = 0;  // the highest place where a value so far may lie
  for (std::size_t i = 0; i + 1 < spectrum.size() && counts.size() < most; ++i) {
    reach = std::max(reach, spectrum[i].value * (1 + spectrum[i].tolerance));
    double floor = spectrum[i + 1].value * (1 - spectrum[i + 1].tolerance);
    for (std::size_t j = i + 2; j < spectrum.size() && spectrum[j].value * 0.5 < floor; ++j) {
      floor = std::min(floor, spectrum[j].value * (1 - spectrum[j].tolerance));
    }
    if (floor - reach >= gap * floor) {
      counts.push_back({pencil, (reach + floor) / 2, static_cast<Index>(i + 1), why});
    }
  }
  return counts;
}

std::vector<ExpectedValue> lowest_values(Pencil pencil, const std::vector<SpectrumValue>& spectrum,
                                         std::size_t most, const std::string& why) {
  std::vector<ExpectedValue> values;
  for (const SpectrumValue& entry : spectrum) {
    if (!values.empty() && entry.value <= values.back().value * (1 + 1e-9)) {
      ++values.back().multiplicity;
      values.back().tolerance = std::max(values.back().tolerance, entry.tolerance);
      continue;
    }
    if (values.size() == most) break;
    values.push_back({pencil, entry.value, 1, entry.tolerance, why});
  }
  return values;
}

}  // namespace stanchion::specimen
