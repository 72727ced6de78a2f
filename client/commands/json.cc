#include "commands/json.h"

#include <cmath>

#include "absl/time/time.h"
#include "commands/words.h"
#include "link/duration.h"
#include "link/status.h"
#include "link/text.h"

namespace drover::commands {
namespace {

using nlohmann::json;

std::string rfc3339(const google::protobuf::Timestamp& stamp) {
  const absl::Time time = absl::FromUnixSeconds(stamp.seconds()) + absl::Nanoseconds(stamp.nanos());
  return absl::FormatTime("%Y-%m-%d%ET%H:%M:%E*SZ", time, absl::UTCTimeZone());
}

double seconds(const google::protobuf::Duration& span) { return absl::ToDoubleSeconds(link::from_proto(span)); }

json to_json(const v1::NamedValue& named) {
  json out = {{"name", named.name()}};
  if (named.value_case() == v1::NamedValue::kNumber) out["value"] = named.number();
  if (named.value_case() == v1::NamedValue::kText) out["value"] = named.text();
  if (!named.unit().empty()) out["unit"] = named.unit();
  return out;
}

json to_json(const v1::CellResult& cell);

template <class Messages>
json list(const Messages& messages) {
  json out = json::array();
  for (const auto& message : messages) out.push_back(to_json(message));
  return out;
}

json to_json(const v1::CellResult& cell) {
  return {{"condition", cell.condition()},
          {"condition_values", list(cell.condition_values())},
          {"weight", cell.weight()},
          {"outputs", list(cell.outputs())}};
}

void put_text(json& out, const char* key, const std::string& text) {
  if (!text.empty()) out[key] = text;
}

}  // namespace

json to_json(const v1::RunCounts& counts) {
  return {{"waiting", counts.waiting()}, {"granted", counts.granted()},     {"begun", counts.begun()},
          {"parked", counts.parked()},   {"stopping", counts.stopping()},   {"evaluated", counts.evaluated()},
          {"failed", counts.failed()},   {"set_aside", counts.set_aside()}, {"withdrawn", counts.withdrawn()}};
}

json to_json(const v1::Study& study) {
  json out = {{"name", study.name()},
              {"state", word(study.state())},
              {"revision", study.revision()},
              {"runs", to_json(study.runs())},
              {"candidates", study.candidates()},
              {"learned", study.learned()},
              {"attempts_lost", study.attempts_lost()},
              {"workers_busy", study.workers_busy()},
              {"slots", study.slots()}};
  put_text(out, "owner", study.owner());
  put_text(out, "reason", word(study.reason()));
  put_text(out, "sentence", study.sentence());
  if (study.spec().budget().runs() > 0) out["budget_runs"] = study.spec().budget().runs();
  if (study.spec().budget().has_deadline()) out["deadline"] = rfc3339(study.spec().budget().deadline());
  if (study.has_best()) out["best"] = to_json(study.best());
  if (study.has_create_time()) out["create_time"] = rfc3339(study.create_time());
  if (study.has_end_time()) out["end_time"] = rfc3339(study.end_time());
  if (study.has_mean_run_time()) out["mean_run_time_s"] = seconds(study.mean_run_time());
  return out;
}

json to_json(const v1::Candidate& candidate) {
  json out = {{"number", candidate.number()},
              {"verdict", word(candidate.verdict())},
              {"values", list(candidate.values())},
              {"objectives", list(candidate.objectives())},
              {"constraints", list(candidate.constraints())},
              {"violation", candidate.violation()}};
  put_text(out, "origin", word(candidate.origin()));
  put_text(out, "reason", candidate.reason());
  if (candidate.cells_size() > 0) out["cells"] = list(candidate.cells());
  return out;
}

json to_json(const v1::Run& run) {
  json out = {{"number", run.number()},        {"candidate", run.candidate()}, {"condition", run.condition()},
              {"replicate", run.replicate()},  {"state", word(run.state())},   {"attempts", run.attempts()},
              {"outputs", list(run.outputs())}};
  put_text(out, "ending", word(run.ending()));
  put_text(out, "failure", word(run.failure()));
  put_text(out, "reason", run.reason());
  put_text(out, "worker", run.worker());
  if (run.has_wall()) out["wall_s"] = seconds(run.wall());
  if (run.live_size() > 0) out["live"] = list(run.live());
  if (run.has_progress()) out["progress"] = run.progress();
  if (run.has_silent()) out["silent_s"] = seconds(run.silent());
  put_text(out, "stdout_tail", link::clean_utf8(run.stdout_tail()));
  put_text(out, "stderr_tail", link::clean_utf8(run.stderr_tail()));
  return out;
}

json to_json(const v1::Worker& worker) {
  json out = {{"name", worker.name()},
              {"host", worker.host()},
              {"version", worker.version()},
              {"slots", worker.slots()},
              {"busy", worker.busy()},
              {"silent", worker.silent()},
              {"codes", std::vector<std::string>(worker.codes().begin(), worker.codes().end())}};
  if (worker.has_heard()) out["heard_s"] = seconds(worker.heard());
  return out;
}

json to_json(const studyfile::Complaint& complaint) {
  json out = {{"file", complaint.file}, {"text", complaint.text}};
  if (complaint.place.line > 0) {
    out["line"] = complaint.place.line;
    out["column"] = complaint.place.column;
  }
  put_text(out, "field", complaint.field);
  put_text(out, "advice", complaint.advice);
  put_text(out, "nearest", complaint.nearest);
  return out;
}

json error_json(const absl::Status& status, const std::string& nearest) {
  json out = {{"code", absl::StatusCodeToString(status.code())}, {"message", std::string(status.message())}};
  put_text(out, "reason", link::error_reason(status));
  put_text(out, "nearest", nearest);
  return out;
}

std::string text_of(const json& document, int indent) {
  return document.dump(indent, ' ', false, json::error_handler_t::replace);
}

}  // namespace drover::commands
