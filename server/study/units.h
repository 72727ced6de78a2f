// Units of measurement, as the udunits database knows them ("m3/s", "degC", "kW.h", "°C").
#pragma once

#include <memory>
#include <string>
#include <string_view>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::study {

// y = scale * x + offset. The identity hands x on bit for bit.
struct Conversion {
  double scale = 1.0;
  double offset = 0.0;
  bool identity() const { return scale == 1.0 && offset == 0.0; }
  double apply(double x) const { return identity() ? x : scale * x + offset; }
};

// The unit database of this process, loaded at the first use and never unloaded. udunits is not safe for threads, so a
// mutex serialises every call; results are plain numbers. Calls cost some microseconds.
//
// FAILED_PRECONDITION from every call that needs the database when it cannot be read.
class Units {
 public:
  static const Units& shared();

  // INVALID_ARGUMENT with the reason in words when `text` is no unit. The empty text is one: not declared.
  absl::Status parse(std::string_view text) const;

  // From numbers in `from` to numbers in `to`. Exactly the identity when the texts are equal (such a pair need not be
  // known: "EUR/a" equals "EUR/a") or when one is empty, for then nothing was declared that could be compared.
  // A factor with a short decimal form is that number (1 bar is 0.1 MPa, not 0.09999999999999999).
  // INVALID_ARGUMENT when a text is no unit, when the dimensions differ ('unit "bar" does not match "m"'), or when the
  // two are not related by a straight line (decibels).
  absl::StatusOr<Conversion> conversion(std::string_view from, std::string_view to) const;

  // A known unit that differs from `text` in capitals only ("MPa" for "mpa"); empty when there is none.
  static std::string nearest_unit(std::string_view text);

 private:
  Units();
  struct Database;
  // Never freed: the one object lives as long as the process.
  Database* database_;
};

}  // namespace drover::study
