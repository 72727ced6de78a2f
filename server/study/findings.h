// What a check has found so far, and the state that the parts of check_spec() share. Internal to this folder.
#pragma once

#include <cstddef>
#include <map>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "drover/v1/problem.pb.h"
#include "study/spec_check.h"

namespace drover::study {

// What to do about a problem; both parts may be empty.
struct Advice {
  std::string text;
  std::string nearest;
};

// Collects problems, at most kMostProblems.
class Findings {
 public:
  void add(std::string field, std::string text, Advice advice = {});
  // `known`'s name nearest to `text`. After the first problems always empty: looking for it takes time in proportion
  // to both lists, and a spec may be wrong in a thousand places.
  std::string nearest_for(std::string_view text, std::span<const std::string> known) const;
  std::vector<v1::Problem> take() { return std::exchange(problems_, {}); }

 private:
  std::vector<v1::Problem> problems_;
};

// "variable[2].low"; without a key "variable[2]".
std::string field_of(std::string_view table, int index, std::string_view key = "");

// A name as it is used in a study: what it belongs to, and whether a formula could use it.
struct NameUse {
  enum class Kind { kVariable, kChoice, kCondition, kOutput, kDerived };
  Kind kind = Kind::kVariable;
  std::string field;  // where it was given; empty for outputs
  std::string unit;
};

// A spec on its way from what was written to what is effective. The check_ functions below read `given`, report to
// `findings` and fill `effective`; they run in the order in which they are declared.
struct Draft {
  const v1::StudySpec& given;
  const CheckContext& context;
  v1::StudySpec effective;
  const v1::CodeDefinition* code = nullptr;      // null: unknown, and nothing can be compared with it
  std::int64_t cells = 1;                        // combinations of condition values, kept at or below kMostCells + 1
  std::map<std::string, NameUse> inputs = {};    // variables and conditions
  std::map<std::string, NameUse> measures = {};  // outputs and derived numbers so far
  Findings findings = {};

  const v1::Accepted* accepted(const std::string& name) const;
  // The list of known names for Problem::nearest and advice.
  static std::vector<std::string> names(const std::map<std::string, NameUse>& uses);
};

void check_study(Draft& draft);      // name, code, replicates, tags (check_study.cc)
void check_variables(Draft& draft);  // check_inputs.cc
void check_conditions(Draft& draft);
void check_coverage(Draft& draft);  // every input of the code is given
void check_derived(Draft& draft);   // check_measures.cc
void check_objectives(Draft& draft);
void check_constraints(Draft& draft);
void check_search(Draft& draft);  // check_search.cc
void check_budget(Draft& draft);

// Finite, or a problem of `field` is added.
bool finite(Draft& draft, const std::string& field, double value);
// Not too long, or a problem is added.
bool short_enough(Draft& draft, const std::string& field, const std::string& text, std::size_t most);
// Adds a problem unless numbers in `from` can be turned into `to`. `whose` ends the sentence 'unit "bar" does not match
// "m"'.
void check_unit(Draft& draft, const std::string& field, const std::string& from, const std::string& to,
                const std::string& whose);

}  // namespace drover::study
