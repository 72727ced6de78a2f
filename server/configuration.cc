#include "configuration.h"

#include <toml++/toml.h>

#include <filesystem>
#include <limits>
#include <optional>
#include <sstream>
#include <utility>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "link/duration.h"
#include "status/try.h"
#include "study/names.h"

namespace drover {
namespace {

std::string place(const std::string& path, const toml::source_region& source) {
  return absl::StrCat(path, ":", source.begin.line, ":", source.begin.column, ": ");
}

absl::Status unknown_key(const std::string& path, const toml::key& key, const std::vector<std::string>& known) {
  const std::string name(key.str());
  const std::string near = study::nearest(name, known);
  return absl::InvalidArgumentError(absl::StrCat(place(path, key.source()), "unknown key ", name,
                                                 near.empty() ? absl::StrCat("; there are ", absl::StrJoin(known, ", "))
                                                              : absl::StrCat("; did you mean ", near, "?")));
}

absl::Status read_licences(const std::string& path, const toml::table& table, Configuration& read) {
  for (const auto& [key, value] : table) {
    const std::optional<std::int64_t> count = value.value_exact<std::int64_t>();
    if (!count || *count < 0 || *count > std::numeric_limits<std::int32_t>::max()) {
      return absl::InvalidArgumentError(absl::StrCat(place(path, value.source()), "licences.", std::string(key.str()),
                                                     " must be a whole number, 0 or more"));
    }
    read.licences[std::string(key.str())] = static_cast<std::int32_t>(*count);
  }
  return absl::OkStatus();
}

absl::Status read_times(const std::string& path, const toml::table& table, Configuration& read) {
  dispatch::Times& times = read.times;
  const std::vector<std::pair<std::string, absl::Duration*>> fields = {{"renew_every", &times.renew_every},
                                                                       {"lease", &times.lease},
                                                                       {"grace", &times.grace},
                                                                       {"patience", &times.patience},
                                                                       {"retry_first", &times.retry_first},
                                                                       {"retry_most", &times.retry_most},
                                                                       {"longest_poll", &times.longest_poll}};
  std::vector<std::string> known;
  for (const auto& [name, field] : fields) known.push_back(name);
  for (const auto& [key, value] : table) {
    const auto at =
        std::find_if(fields.begin(), fields.end(), [&](const auto& field) { return field.first == key.str(); });
    if (at == fields.end()) return unknown_key(path, key, known);
    const std::optional<std::string> text = value.value_exact<std::string>();
    const absl::StatusOr<absl::Duration> span = link::parse_duration(text.value_or(""));
    if (!span.ok()) {
      return absl::InvalidArgumentError(absl::StrCat(place(path, value.source()), "times.", at->first,
                                                     " must be a span of time, as \"30s\" or \"2m\""));
    }
    *at->second = *span;
  }
  if (const absl::Status valid = times.validate(); !valid.ok()) {
    return absl::InvalidArgumentError(absl::StrCat(place(path, table.source()), valid.message()));
  }
  return absl::OkStatus();
}

absl::StatusOr<Configuration> read_file(const std::string& path) {
  const toml::table file = toml::parse_file(path);  // throws
  Configuration read;
  for (const auto& [key, value] : file) {
    const bool licences = key.str() == "licences";
    if (!licences && key.str() != "times") return unknown_key(path, key, {"licences", "times"});
    if (!value.is_table()) {
      return absl::InvalidArgumentError(absl::StrCat(place(path, value.source()), std::string(key.str()),
                                                     " must be a table: write [", std::string(key.str()), "]"));
    }
    DROVER_TRY(licences ? read_licences(path, *value.as_table(), read) : read_times(path, *value.as_table(), read));
  }
  return read;
}

}  // namespace

absl::StatusOr<Configuration> read_configuration(const std::string& path) {
  if (!std::filesystem::exists(path)) return absl::NotFoundError(absl::StrCat("no configuration file ", path));
  try {
    return read_file(path);
  } catch (const toml::parse_error& error) {
    return absl::InvalidArgumentError(absl::StrCat(place(path, error.source()), std::string(error.description())));
  }
}

}  // namespace drover
