// The example's three files agree with each other and with what the program reads and writes.
#include <gtest/gtest.h>
#include <toml++/toml.h>

#include <cmath>
#include <set>
#include <string>

#include "penstock/cost.h"
#include "penstock/rejection.h"
#include "penstock/report.h"
#include "reference/penstock/demo_deck.h"

namespace penstock {
namespace {

const std::string kExample = DROVER_SOURCE "/docs/examples/penstock/";

std::set<std::string> names_in(const toml::table& file, const char* list) {
  std::set<std::string> names;
  const toml::array* entries = file[list].as_array();
  for (std::size_t i = 0; entries != nullptr && i < entries->size(); ++i) {
    names.insert(entries->get(i)->at_path("name").value_or(std::string()));
  }
  return names;
}

TEST(PenstockExample, GivesTheCodeEverythingItAccepts) {
  const toml::table study = toml::parse_file(kExample + "study.toml");
  const toml::table code = toml::parse_file(kExample + "codes/penstock-surge/code.toml");

  std::set<std::string> given = names_in(study, "variable");
  given.merge(names_in(study, "condition"));

  EXPECT_EQ(given, names_in(code, "accepts"));
  EXPECT_EQ(given.size(), 6u);
}

TEST(PenstockExample, MarksEachInputOnceInTheTemplate) {
  const toml::table code = toml::parse_file(kExample + "codes/penstock-surge/code.toml");
  const std::string deck = text_of(kExample + "codes/penstock-surge/case.inp.in");

  for (const std::string& name : names_in(code, "accepts")) {
    const auto at = deck.find("[=" + name + "=]");
    EXPECT_NE(at, std::string::npos) << name;
    EXPECT_EQ(deck.find("[=" + name + "=]", at + 1), std::string::npos) << name;
  }
}

TEST(PenstockExample, FindsEachOutputOnceInAReport) {
  const toml::table code = toml::parse_file(kExample + "codes/penstock-surge/code.toml");
  const Case c = demo_case();
  const Steady steady = steady_state(c);
  const std::string text = report(c, steady, reject_load(c, steady, [](double, double, double) {}), cost_of(c));

  const toml::array* outputs = code["output"].as_array();
  ASSERT_NE(outputs, nullptr);
  for (std::size_t i = 0; i < outputs->size(); ++i) {
    const auto after = outputs->get(i)->at_path("after").value_or(std::string());
    EXPECT_TRUE(std::isfinite(number_after(text, after))) << after;
    EXPECT_EQ(text.find(after, text.find(after) + 1), std::string::npos) << after << " is there twice";
  }
}

TEST(PenstockExample, BeginsWithTodaysDesign) {
  const toml::table study = toml::parse_file(kExample + "study.toml");
  const toml::array* variables = study["variable"].as_array();
  ASSERT_NE(variables, nullptr);

  for (std::size_t i = 0; i < variables->size(); ++i) {
    const auto entry = toml::node_view(*variables->get(i));
    const std::string name = entry["name"].value_or(std::string());
    const std::string here = todays_design().at(name);
    if (name == "steel") {
      EXPECT_EQ(entry["baseline"].value_or(std::string()), here);
    } else {
      EXPECT_EQ(entry["baseline"].value_or(0.0), std::strtod(here.c_str(), nullptr)) << name;
    }
  }
}

}  // namespace
}  // namespace penstock
