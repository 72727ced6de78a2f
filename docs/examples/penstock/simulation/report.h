// The report: a text for people, whose last part ("RESULTS") has one number a line. A plant that did not survive has
// a line that begins with "*** FATAL" in place of the envelope and the results.
#pragma once

#include <string>

#include "case.h"
#include "cost.h"
#include "rejection.h"
#include "steady.h"

namespace penstock {

std::string report(const Case& c, const Steady& steady, const Rejection& rejection, const Cost& cost);

}  // namespace penstock
