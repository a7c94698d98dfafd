#pragma once
// A chart's settings come from several sections: its measurand's own under the check standard, then the check
// standard's own, then those for all.
#include <string>
#include <vector>

#include "config/section.hpp"
#include "core/base/settings.hpp"

namespace agreed::settings_file {

class ChartLayers {
 public:
  /// The one that counts most first; never empty.
  explicit ChartLayers(std::vector<Section> layers) : layers_(std::move(layers)) {}

  /// The first section that has a usable value for the key; the last, with its default, where none has.
  [[nodiscard]] const Section& from(const std::string& name) const;
  /// The first section that has the key, a section or list, at all.
  [[nodiscard]] const Section& having(const std::string& name) const;
  [[nodiscard]] int whole_number(const std::string& name, int otherwise) const {
    return from(name).whole_number(name).value_or(otherwise);
  }
  [[nodiscard]] std::optional<double> number(const std::string& name) const {
    return from(name).number(name);
  }
  [[nodiscard]] std::optional<double> run_length() const { return number("in_control_run_length"); }

 private:
  std::vector<Section> layers_;
};

/// Of one measurand of a check standard; `general`: the section for all.
[[nodiscard]] ChartLayers layers_of(const Section& standard, const std::string& measurand,
                                    const Section& general);

[[nodiscard]] ChartMethod method_of(const ChartLayers& layers);

/// What a classical chart of these layers looks for.
[[nodiscard]] ClassicalSettings read_classical(const ChartLayers& layers);

/// Tells what cannot be meant about classical charts, at each place where it stands.
void check_classical(const Section& top);

}  // namespace agreed::settings_file
