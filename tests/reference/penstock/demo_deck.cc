#include "reference/penstock/demo_deck.h"

#include <gtest/gtest.h>

#include <cstdlib>
#include <fstream>
#include <iterator>
#include <limits>
#include <variant>

#include "penstock/deck.h"

namespace penstock {

Marks todays_design() {
  return {{"diameter", "0.50"}, {"wall", "9.0"},         {"steel", "S235"},
          {"jets", "2"},        {"closing_time", "8.0"}, {"river_flow", "0.35"}};
}

Marks best_design() {
  return {{"diameter", "0.4218"}, {"wall", "4.5"},          {"steel", "S355"},
          {"jets", "2"},          {"closing_time", "10.7"}, {"river_flow", "0.35"}};
}

std::string text_of(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(file), std::istreambuf_iterator<char>()};
}

std::string with(std::string text, const std::string& from, const std::string& to) {
  const auto at = text.find(from);
  EXPECT_NE(at, std::string::npos) << from;
  if (at != std::string::npos) text.replace(at, from.size(), to);
  return text;
}

std::string demo_deck(const Marks& values) {
  Marks all = values;
  all.merge(todays_design());
  std::string deck = text_of(DROVER_SOURCE "/docs/examples/penstock/codes/penstock-surge/case.inp.in");
  for (const auto& [name, value] : all) deck = with(deck, "[=" + name + "=]", value);
  EXPECT_EQ(deck.find("[="), std::string::npos) << "a mark that these tests do not know";
  return deck;
}

Case demo_case(const Marks& values) {
  const auto read = read_deck(demo_deck(values));
  if (const auto* error = std::get_if<DeckError>(&read)) {
    ADD_FAILURE() << error->line << ": " << error->message;
    std::abort();
  }
  return std::get<Case>(read);
}

double number_after(const std::string& text, const std::string& label) {
  const auto at = text.find(label);
  if (at == std::string::npos) return std::numeric_limits<double>::quiet_NaN();
  const char* begin = text.c_str() + at + label.size();
  char* end = nullptr;
  const double value = std::strtod(begin, &end);
  return end == begin ? std::numeric_limits<double>::quiet_NaN() : value;
}

}  // namespace penstock
