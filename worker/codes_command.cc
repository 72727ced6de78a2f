#include "codes_command.h"

#include <iostream>
#include <nlohmann/json.hpp>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "absl/strings/str_split.h"
#include "code/catalogue.h"
#include "exit_code.h"
#include "link/duration.h"
#include "link/text.h"
#include "places.h"

namespace drover {
namespace {

constexpr std::size_t kDigitsShown = 12;

nlohmann::json describe(const code::Definition& code) {
  nlohmann::json accepts = nlohmann::json::array(), outputs = nlohmann::json::array();
  for (const v1::Accepted& accepted : code.accepts) {
    nlohmann::json one = {{"name", accepted.name()}, {"unit", accepted.unit()}};
    for (const std::string& choice : accepted.choices()) one["choices"].push_back(choice);
    accepts.push_back(std::move(one));
  }
  for (const code::OutputReader& output : code.outputs) {
    outputs.push_back({{"name", output.name}, {"unit", output.unit}, {"file", output.file}});
  }
  nlohmann::json made = {{"name", code.name},
                         {"version", code.version},
                         {"digest", code.digest},
                         {"folder", code.folder},
                         {"command", code.command},
                         {"cores", code.cores},
                         {"time_limit_s", absl::ToDoubleSeconds(code.time_limit)},
                         {"grace_s", absl::ToDoubleSeconds(code.grace)},
                         {"licences", code.licences},
                         {"accepts", std::move(accepts)},
                         {"outputs", std::move(outputs)}};
  if (code.memory_bytes > 0) made["memory_bytes"] = code.memory_bytes;
  return made;
}

std::string with_unit(const std::string& name, const std::string& unit) {
  return unit.empty() ? name : absl::StrCat(name, " [", unit, "]");
}

void print(const code::Definition& code) {
  std::vector<std::string> accepts, outputs;
  for (const v1::Accepted& accepted : code.accepts) accepts.push_back(with_unit(accepted.name(), accepted.unit()));
  for (const code::OutputReader& output : code.outputs) outputs.push_back(with_unit(output.name, output.unit));
  std::cout << link::printable(absl::StrCat(code.name, code.version.empty() ? "" : " ", code.version)) << "  digest "
            << code.digest.substr(0, kDigitsShown) << "\n"
            << "  command     " << link::printable(absl::StrJoin(code.command, " ")) << "\n"
            << "  takes       " << link::printable(absl::StrJoin(accepts, ", ")) << "\n"
            << "  gives       " << link::printable(absl::StrJoin(outputs, ", ")) << "\n"
            << "  time limit  " << link::human(code.time_limit) << ", then " << link::human(code.grace) << " to end\n"
            << "  cores       " << code.cores << "\n";
}

}  // namespace

int show_codes(const std::string& folder, bool json) {
  const absl::StatusOr<code::Catalogue> catalogue = code::read_catalogue(absolute_path(folder));
  if (!catalogue.ok()) {
    std::cerr << "drover-worker: " << catalogue.status().message() << "\n";
    return kUsage;
  }
  if (json) {
    nlohmann::json made = {{"codes", nlohmann::json::array()}, {"problems", nlohmann::json::array()}};
    for (const code::Definition& code : catalogue->codes) made["codes"].push_back(describe(code));
    for (const std::string& problem : catalogue->problems) {
      for (const auto line : absl::StrSplit(problem, '\n', absl::SkipEmpty())) {
        made["problems"].push_back(std::string(line));
      }
    }
    std::cout << made.dump(2, ' ', false, nlohmann::json::error_handler_t::replace) << "\n";
  } else {
    for (const code::Definition& code : catalogue->codes) print(code);
    if (catalogue->codes.empty() && catalogue->problems.empty()) {
      std::cerr << "drover-worker: no code is defined in " << link::printable(folder)
                << "; each has a folder of its own there, with a code.toml\n";
    }
  }
  for (const std::string& problem : catalogue->problems) std::cerr << link::printable(problem, true) << "\n";
  return catalogue->problems.empty() ? kDone : kUsage;
}

}  // namespace drover
