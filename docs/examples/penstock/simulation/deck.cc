#include "deck.h"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <optional>
#include <set>
#include <vector>

namespace penstock {
namespace {

using Words = std::vector<std::string_view>;

struct NumberCard {
  std::string_view keyword;
  double Case::*value;
  double low, high;  // both allowed
  bool needed = true;
};

struct CountCard {
  std::string_view keyword;
  int Case::*value;
  int low, high;
};

constexpr NumberCard kNumberCards[] = {
    {"RESERVOIR LEVEL", &Case::reservoir_m, -500, 9000},
    {"WATER DENSITY", &Case::water_density, 900, 1100},
    {"WATER VISCOSITY", &Case::water_viscosity, 1e-4, 1e-2},
    {"WATER BULK MODULUS", &Case::water_bulk_modulus, 1e8, 1e10},
    {"ATMOSPHERE", &Case::atmosphere_kpa, 30, 120},
    {"VAPOUR PRESSURE", &Case::vapour_pressure_kpa, 0, 20},
    {"PIPE DIAMETER", &Case::diameter_m, 0.05, 10},
    {"PIPE WALL", &Case::wall_mm, 0.5, 200},
    {"PIPE CORROSION", &Case::corrosion_mm, 0, 10},
    {"PIPE ROUGHNESS", &Case::roughness_mm, 0, 10},
    {"PIPE MODULUS", &Case::pipe_modulus, 1e8, 1e12},
    {"PIPE POISSON", &Case::poisson, 0, 0.5},
    {"PIPE JOINT FACTOR", &Case::joint_factor, 0.1, 1},
    {"LOSS INTAKE", &Case::loss_intake, 0, 100},
    {"LOSS BENDS", &Case::loss_bends, 0, 100},
    {"RIVER FLOW", &Case::river_flow_m3s, 1e-4, 1000},
    {"RATED FLOW", &Case::rated_flow_m3s, 1e-4, 1000},
    {"NOZZLE COEFFICIENT", &Case::nozzle_coefficient, 0.5, 1},
    {"RUNNER EFFICIENCY", &Case::runner_efficiency, 0.1, 1},
    {"GENERATOR EFFICIENCY", &Case::generator_efficiency, 0.1, 1},
    {"ROTOR INERTIA", &Case::rotor_inertia, 1e-3, 1e9},
    {"ROTOR SPEED", &Case::rotor_rpm, 1, 10000},
    {"CLOSING TIME", &Case::closing_time_s, 1e-3, 3600},
    {"CAVITY LIMIT", &Case::cavity_limit_m3, 0, 1000},
    {"COST COATING", &Case::cost_coating_per_m2, 0, 1e9},
    {"COST TRENCH", &Case::cost_trench_per_m, 0, 1e9},
    {"COST TRENCH WIDTH", &Case::cost_trench_per_m2, 0, 1e9},
    {"COST JET", &Case::cost_jet, 0, 1e12},
    {"COST FIXED", &Case::cost_fixed, 0, 1e12},
    {"INTEREST RATE", &Case::interest_rate, 0, 1},
    {"LIFE YEARS", &Case::life_years, 1, 200},
    {"UPKEEP RATE", &Case::upkeep_rate, 0, 1, false},
};

constexpr CountCard kCountCards[] = {
    {"JETS", &Case::jets, 1, 6},
    {"GRID REACHES", &Case::reaches, 2, 100000},
};

constexpr std::string_view kBlanks = " \t\r";

std::string_view trimmed(std::string_view text) {
  const auto first = text.find_first_not_of(kBlanks);
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(kBlanks) - first + 1);
}

Words words_of(std::string_view text) {
  Words words;
  for (text = trimmed(text); !text.empty(); text = trimmed(text)) {
    words.push_back(text.substr(0, text.find_first_of(kBlanks)));
    text.remove_prefix(words.back().size());
  }
  return words;
}

std::optional<double> number(std::string_view word) {
  if (word.starts_with('+')) word.remove_prefix(1);
  double value = 0;
  const auto [end, error] = std::from_chars(word.data(), word.data() + word.size(), value);
  if (error != std::errc() || end != word.data() + word.size() || !std::isfinite(value)) return std::nullopt;
  return value;
}

std::string quoted(std::string_view text) { return '"' + std::string(text) + '"'; }

std::string range_text(double low, double high) {
  char text[64];
  std::snprintf(text, sizeof text, "%g to %g", low, high);
  return text;
}

// Takes one card after the other. What a method returns is the message of an error; empty means taken.
class Reader {
 public:
  std::string take(std::string_view line);
  std::string missing() const;
  bool ended() const { return ended_; }
  Case result() && { return std::move(case_); }

 private:
  std::string take_number(const NumberCard& card, const Words& values);
  std::string take_count(const CountCard& card, const Words& values);
  std::string take_profile(const Words& values);
  std::string take_steel(const Words& values);
  std::string take_text(std::string_view keyword, std::string_view rest);

  Case case_;
  std::set<std::string, std::less<>> seen_;
  bool ended_ = false;
};

std::string Reader::take(std::string_view line) {
  if (trimmed(line).empty() || line.starts_with('*')) return {};
  const std::string_view keyword = trimmed(line.substr(0, 20));
  const std::string_view rest = line.size() > 20 ? trimmed(line.substr(20)) : std::string_view();
  if (keyword == "END") {
    ended_ = true;
    return {};
  }
  if (keyword == "PROFILE") return take_profile(words_of(rest));
  if (keyword == "STEEL") return take_steel(words_of(rest));
  if (!seen_.emplace(keyword).second) return "card " + quoted(keyword) + " is given twice";
  for (const NumberCard& card : kNumberCards) {
    if (card.keyword == keyword) return take_number(card, words_of(rest));
  }
  for (const CountCard& card : kCountCards) {
    if (card.keyword == keyword) return take_count(card, words_of(rest));
  }
  return take_text(keyword, rest);
}

std::string Reader::take_number(const NumberCard& card, const Words& values) {
  if (values.size() != 1) return "card " + quoted(card.keyword) + " takes one number from column 21 on";
  const auto value = number(values[0]);
  if (!value) return quoted(values[0]) + " of card " + quoted(card.keyword) + " is not a number";
  if (*value < card.low || *value > card.high) {
    return quoted(values[0]) + " of card " + quoted(card.keyword) + " is outside " + range_text(card.low, card.high);
  }
  case_.*card.value = *value;
  return {};
}

std::string Reader::take_count(const CountCard& card, const Words& values) {
  if (values.size() != 1) return "card " + quoted(card.keyword) + " takes one number from column 21 on";
  const auto value = number(values[0]);
  if (!value || *value != std::floor(*value)) {
    return quoted(values[0]) + " of card " + quoted(card.keyword) + " is not a whole number";
  }
  if (*value < card.low || *value > card.high) {
    return quoted(values[0]) + " of card " + quoted(card.keyword) + " is outside " + range_text(card.low, card.high);
  }
  case_.*card.value = static_cast<int>(*value);
  return {};
}

std::string Reader::take_profile(const Words& values) {
  const auto station = values.size() == 2 ? number(values[0]) : std::nullopt;
  const auto elevation = values.size() == 2 ? number(values[1]) : std::nullopt;
  if (!station || !elevation) return "card \"PROFILE\" takes two numbers: station and elevation in m";
  if (case_.profile.empty() ? *station != 0 : *station <= case_.profile.back().station_m) {
    return "the stations of \"PROFILE\" begin at 0 and rise; " + quoted(values[0]) + " does not";
  }
  case_.profile.push_back({.station_m = *station, .elevation_m = *elevation});
  return {};
}

std::string Reader::take_steel(const Words& values) {
  const auto yield = values.size() == 3 ? number(values[1]) : std::nullopt;
  const auto price = values.size() == 3 ? number(values[2]) : std::nullopt;
  if (!yield || !price || *yield <= 0 || *price < 0) {
    return "card \"STEEL\" takes a grade, its yield strength in MPa and its price a kg";
  }
  for (const SteelGrade& grade : case_.grades) {
    if (grade.name == values[0]) return "grade " + quoted(values[0]) + " is given twice";
  }
  case_.grades.push_back({.name = std::string(values[0]), .yield_mpa = *yield, .price_per_kg = *price});
  return {};
}

std::string Reader::take_text(std::string_view keyword, std::string_view rest) {
  if (keyword == "TITLE") {
    case_.title = rest;
  } else if (keyword == "REPORT FILE") {
    if (rest.empty()) return "card \"REPORT FILE\" takes a file name from column 21 on";
    case_.report_file = rest;
  } else if (keyword == "PIPE STEEL") {
    if (rest.empty()) return "card \"PIPE STEEL\" takes the name of a grade from column 21 on";
    case_.steel = rest;
  } else if (keyword == "PIPE ANCHORED") {
    if (rest != "YES" && rest != "NO") return "card \"PIPE ANCHORED\" takes YES or NO";
    case_.anchored = rest == "YES";
  } else {
    return "unknown card " + quoted(keyword);
  }
  return {};
}

std::string Reader::missing() const {
  for (const NumberCard& card : kNumberCards) {
    if (card.needed && !seen_.contains(card.keyword)) return "card " + quoted(card.keyword) + " is missing";
  }
  for (const CountCard& card : kCountCards) {
    if (!seen_.contains(card.keyword)) return "card " + quoted(card.keyword) + " is missing";
  }
  for (const std::string_view keyword : {"PIPE STEEL", "PIPE ANCHORED"}) {
    if (!seen_.contains(keyword)) return "card " + quoted(keyword) + " is missing";
  }
  if (case_.profile.size() < 2) return "at least two cards \"PROFILE\" are needed";
  if (std::none_of(case_.grades.begin(), case_.grades.end(),
                   [this](const SteelGrade& grade) { return grade.name == case_.steel; })) {
    return "no card \"STEEL\" gives grade " + quoted(case_.steel);
  }
  if (case_.corrosion_mm >= case_.wall_mm) return "\"PIPE CORROSION\" leaves nothing of \"PIPE WALL\"";
  if (std::any_of(case_.profile.begin(), case_.profile.end(),
                  [this](const ProfilePoint& point) { return point.elevation_m >= case_.reservoir_m; })) {
    return "\"PROFILE\" rises above \"RESERVOIR LEVEL\"";
  }
  return {};
}

}  // namespace

std::variant<Case, DeckError> read_deck(std::string_view text) {
  Reader reader;
  int line_number = 0;
  while (!text.empty() && !reader.ended()) {
    const auto end = text.find('\n');
    ++line_number;
    std::string message = reader.take(text.substr(0, end));
    if (!message.empty()) return DeckError{line_number, std::move(message)};
    text.remove_prefix(end == std::string_view::npos ? text.size() : end + 1);
  }
  if (!reader.ended()) return DeckError{std::max(line_number, 1), "card \"END\" is missing"};
  std::string message = reader.missing();
  if (!message.empty()) return DeckError{line_number, std::move(message)};
  return std::move(reader).result();
}

}  // namespace penstock
