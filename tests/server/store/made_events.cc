#include "server/store/made_events.h"

#include <cstdlib>
#include <filesystem>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/bytes.h"

namespace drover::store {

TestFolder::TestFolder() {
  path_ = (std::filesystem::temp_directory_path() / "drover-store-XXXXXX").string();
  if (mkdtemp(path_.data()) == nullptr) std::abort();
}

TestFolder::~TestFolder() {
  std::error_code ignored;
  std::filesystem::remove_all(path_, ignored);
}

StoreOptions test_options() {
  StoreOptions options;
  options.fresh_id = "store-1";
  return options;
}

study::Event code_defined() {
  study::Event event;
  event.mutable_code_defined()->mutable_definition()->set_name("code");
  event.mutable_code_defined()->mutable_definition()->set_digest("c0de");
  return event;
}

study::Event session_opened(std::int64_t session) {
  study::Event event;
  study::SessionOpened& opened = *event.mutable_session_opened();
  opened.set_session(session);
  opened.set_token(absl::StrCat("token-", session));
  opened.set_worker("w1");
  opened.set_slots(2);
  return event;
}

study::Event study_started(std::int64_t study) {
  study::Event event;
  event.set_study(study);
  study::StudyStarted& started = *event.mutable_study_started();
  started.set_study(study);
  started.mutable_spec()->set_name(absl::StrCat("s", study));
  started.add_codes()->set_digest("c0de");
  study::Cell& cell = *started.add_cells();
  cell.set_weight(study::pack_double(1.0));
  return event;
}

study::Event asks_issued(std::int64_t n) {
  study::Event event;
  event.set_study(1);
  study::IssuedAsk& ask = *event.mutable_asks_issued()->add_asks();
  ask.set_ask(n);
  ask.set_candidate(n);
  ask.set_origin(v1::ORIGIN_SEARCH);
  ask.set_point(study::pack_double(0.5));
  ask.set_values(study::pack_double(-0.0));
  ask.set_digest("d");
  study::IssuedRun& run = *ask.add_runs();
  run.set_run(n);
  run.set_number(n);
  run.set_input_digest("inputs");
  event.mutable_asks_issued()->set_search_state(absl::StrCat("state ", n));
  return event;
}

study::Event granted(std::int64_t run, std::int64_t fence, std::int64_t session) {
  study::Event event;
  event.set_study(1);
  event.mutable_granted()->set_run(run);
  event.mutable_granted()->set_fence(fence);
  event.mutable_granted()->set_session(session);
  (*event.mutable_granted()->mutable_licences())["pool"] = 1;
  return event;
}

study::Event settled(std::int64_t run, std::int64_t fence, double value) {
  study::Event event;
  event.set_study(1);
  event.mutable_settled()->set_run(run);
  event.mutable_settled()->set_fence(fence);
  v1::AttemptReport& report = *event.mutable_settled()->mutable_report();
  report.set_ending(v1::ENDING_EVALUATED);
  report.add_outputs()->set_name("height");
  report.mutable_outputs(0)->set_value(value);
  report.mutable_usage()->mutable_wall()->set_seconds(2);
  return event;
}

study::Event learned(std::int64_t candidate, double value, bool leads) {
  study::Event event;
  event.set_study(1);
  study::CandidateLearned& learned = *event.mutable_candidate_learned();
  learned.set_candidate(candidate);
  learned.set_position(candidate);
  learned.set_leads(leads);
  learned.mutable_score()->set_verdict(v1::CANDIDATE_VERDICT_FEASIBLE);
  learned.mutable_score()->set_objectives(study::pack_double(value));
  return event;
}

absl::Status append(Store& store, const study::Event& event) {
  DROVER_TRY(store.begin());
  if (const absl::Status appended = store.append(event).status(); !appended.ok()) {
    store.rollback();
    return appended;
  }
  const absl::Status committed = store.commit();
  if (!committed.ok()) store.rollback();
  return committed;
}

absl::StatusOr<std::unique_ptr<Store>> store_with_study(const std::string& folder) {
  DROVER_ASSIGN(std::unique_ptr<Store> store, Store::open(folder, test_options()));
  for (const study::Event& event : {code_defined(), session_opened(1), study_started(1)})
    DROVER_TRY(append(*store, event));
  return store;
}

absl::Status whole_run(Store& store, std::int64_t n, double value) {
  for (const study::Event& event : {asks_issued(n), granted(n, 1), settled(n, 1, value), learned(n, value, n == 1)}) {
    DROVER_TRY(append(store, event));
  }
  return absl::OkStatus();
}

}  // namespace drover::store
