// The demo's deck, as a worker would write it from the example's template.
#pragma once

#include <map>
#include <string>

#include "penstock/case.h"

namespace penstock {

// Values by the name of their mark, as texts.
using Marks = std::map<std::string, std::string>;

Marks todays_design();  // the baseline of the example's study, at the largest flow
Marks best_design();    // next to the burst: the best that a thorough search of the box has shown

// The template with every mark filled; the names missing in `values` come from todays_design().
std::string demo_deck(const Marks& values = {});
Case demo_case(const Marks& values = {});

std::string text_of(const std::string& path);  // a file's whole text; empty when it cannot be read

// `text` with the first `from` replaced, which must be there.
std::string with(std::string text, const std::string& from, const std::string& to);

// The first number after `label` in a report; NaN when there is none.
double number_after(const std::string& text, const std::string& label);

}  // namespace penstock
