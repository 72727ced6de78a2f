// Messages of the contract as the client's JSON. A promise: fields are added, never changed or taken away.
//
// Absent values are left out. Spans are seconds ("..._s"), instants RFC 3339 in UTC, states lower-case words, values
// {"name", "value", "unit"}. Bytes become valid UTF-8.
#pragma once

#include <nlohmann/json.hpp>
#include <string>

#include "absl/status/status.h"
#include "drover/v1/studies.pb.h"
#include "studyfile/complaint.h"

namespace drover::commands {

nlohmann::json to_json(const v1::Study& study);
nlohmann::json to_json(const v1::Candidate& candidate);
nlohmann::json to_json(const v1::Run& run);
nlohmann::json to_json(const v1::RunCounts& counts);
nlohmann::json to_json(const v1::Worker& worker);
nlohmann::json to_json(const studyfile::Complaint& complaint);
nlohmann::json error_json(const absl::Status& status, const std::string& nearest);

// On one line, or indented. Never throws: what is no UTF-8 is replaced.
std::string text_of(const nlohmann::json& document, int indent = -1);

}  // namespace drover::commands
