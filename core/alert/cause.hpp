#pragma once
// The likely cause and the results in doubt, added to what is told of a lost or a changed agreement.
//
// They change with every reading, and an alert that changed with every reading would be read by nobody: an
// open alert keeps what it said for as long as the same analyzer is named, the probability is within 0.05 of
// what was told and the look-back begins at the same pair. The comparison always shows the newest.
//
// Details, by name: moved (x, y, both, neither, undecided), probability, evidence, look_back_from and
// look_back_to (RFC 3339), look_back_from_is (agreement_shown, start_of_data), look_back_pairs,
// look_back_hours, look_back_samples.
#include "core/alert/alert.hpp"
#include "core/pair/comparison_view.hpp"

namespace agreed {

/// A finding that a diagnosis says something of: agreement_lost, agreement_drifting, that holds.
[[nodiscard]] bool has_cause(const Finding& finding);

/// `told`: the open alert of the finding, null when there is none.
void add_cause(Finding& finding, const DiagnosisView& diagnosis, const LookBackView& look_back,
               const Alert* told);

}  // namespace agreed
