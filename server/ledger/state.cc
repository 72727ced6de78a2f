#include "ledger/state.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/durations.h"
#include "status/try.h"
#include "study/bytes.h"
#include "study/cells.h"

namespace drover::ledger {

namespace {

bool grants(v1::StudyState state) { return state == v1::STUDY_STATE_ACTIVE || state == v1::STUDY_STATE_FINISHING; }

}  // namespace

State::State(const dispatch::Times& times) : book(times) {}

StudyRecord* State::study(std::int64_t id) {
  const auto at = studies_.find(id);
  return at == studies_.end() ? nullptr : &at->second;
}

const StudyRecord* State::study(std::int64_t id) const {
  const auto at = studies_.find(id);
  return at == studies_.end() ? nullptr : &at->second;
}

StudyRecord* State::study(const std::string& name) {
  const auto at = by_name_.find(name);
  return at == by_name_.end() ? nullptr : study(at->second);
}

const v1::CodeDefinition* State::code(const std::string& digest) const {
  const auto at = codes_.find(digest);
  return at == codes_.end() ? nullptr : &at->second;
}

std::vector<v1::CodeDefinition> State::live_codes() const {
  std::vector<v1::CodeDefinition> live;
  for (const std::string& digest : code_order_) {
    const bool held = std::any_of(book.sessions().begin(), book.sessions().end(), [&](const auto& entry) {
      return !entry.second.lapsed && entry.second.code_digests.contains(digest);
    });
    if (held) live.push_back(codes_.at(digest));
  }
  std::stable_sort(live.begin(), live.end(), [](const auto& a, const auto& b) { return a.name() < b.name(); });
  return live;
}

study::Standing State::standing(const StudyRecord& record, absl::Time wall) const {
  const v1::Budget& budget = record.spec.budget();
  const absl::Time deadline = budget.has_deadline() ? absl::FromUnixSeconds(budget.deadline().seconds())
                                                    : absl::InfiniteFuture();
  return {.state = record.state,
          .order = record.spec.search().order(),
          .asked = record.asked,
          .absorbed = record.absorbed,
          .learned = record.learned,
          .used = record.used,
          .open = book.open_count(record.id),
          .set_aside = book.set_aside_count(record.id),
          .budget = budget.runs(),
          .runs_per_candidate = record.plan->runs_per_candidate(),
          .parallel = record.spec.search().parallel(),
          .slots = book.slots_for(record.id),
          .look_ahead = record.look_ahead,
          .deadline_passed = wall >= deadline};
}

absl::Status State::apply(const study::Event& event, absl::Duration now) {
  using study::Event;
  // What the book forgets with the run, the candidate's record needs first.
  if (event.has_settled()) {
    if (const dispatch::Run* const run = book.run(event.settled().run())) end_run(*run, &event.settled().report());
  } else if (event.has_withdrawn()) {
    if (const dispatch::Run* const run = book.run(event.withdrawn().run())) end_run(*run, nullptr);
  }
  DROVER_TRY(book.apply(event, now));
  StudyRecord* const record = study(event.study());
  switch (event.kind_case()) {
    case Event::kCodeDefined:
      add_code(event.code_defined().definition());
      return absl::OkStatus();
    case Event::kSessionOpened:
      next_session = std::max(next_session, event.session_opened().session() + 1);
      return absl::OkStatus();
    case Event::kStudyStarted:
      return start_study(event.study_started());
    case Event::kStudyChanged:
      if (record == nullptr) return absl::InternalError("a study changed that is not open");
      record->state = event.study_changed().state();
      record->reason = event.study_changed().reason();
      record->sentence = event.study_changed().sentence();
      book.set_granting(record->id, grants(record->state));
      return absl::OkStatus();
    case Event::kAsksIssued:
      if (record == nullptr) return absl::InternalError("asks were issued for a study that is not open");
      return issue(*record, event.asks_issued());
    case Event::kCandidateLearned:
      if (record == nullptr) return absl::InternalError("a candidate was learned of a study that is not open");
      ++record->learned;
      record->open.erase(event.candidate_learned().candidate());
      if (event.candidate_learned().leads()) record->best = event.candidate_learned().score();
      return absl::OkStatus();
    default:
      return absl::OkStatus();
  }
}

void State::add_code(const v1::CodeDefinition& definition) {
  codes_[definition.digest()] = definition;
  code_order_.push_back(definition.digest());
}

absl::Status State::start_study(const study::StudyStarted& started) {
  StudyRecord record;
  record.id = started.study();
  record.name = started.spec().name();
  record.owner = started.owner();
  record.spec = started.spec();
  record.state = v1::STUDY_STATE_ACTIVE;
  record.look_ahead = started.window();
  return add_study(std::move(record), {started.cells().begin(), started.cells().end()});
}

absl::Status State::add_study(StudyRecord record, const std::vector<study::Cell>& cells) {
  next_study = std::max(next_study, record.id + 1);
  std::vector<v1::CodeDefinition> definitions;
  for (const v1::CodeUse& use : record.spec.codes()) {
    const v1::CodeDefinition* const definition = code(use.digest());
    if (definition == nullptr) return absl::InternalError(absl::StrCat("code ", use.digest(), " is not in the store"));
    definitions.push_back(*definition);
  }
  DROVER_ASSIGN(const std::vector<study::CellValues> values, study::unpack_cells(cells));
  DROVER_ASSIGN(record.plan, study::StudyPlan::make(record.spec, definitions, values));
  dispatch::Study booked{.id = record.id, .priority = record.spec.priority(), .granting = grants(record.state)};
  booked.tags.assign(record.spec.tags().begin(), record.spec.tags().end());
  for (const v1::CodeDefinition& definition : definitions) {
    booked.code_digests.push_back(definition.digest());
    booked.licences.emplace_back(definition.licences().begin(), definition.licences().end());
    booked.time_limits.push_back(to_duration(definition.time_limit()) + to_duration(definition.grace()));
  }
  book.add_study(std::move(booked));
  by_name_[record.name] = record.id;
  studies_[record.id] = std::move(record);
  return absl::OkStatus();
}

absl::Status State::issue(StudyRecord& record, const study::AsksIssued& issued) {
  record.absorbed = issued.absorbed_through();
  for (const study::IssuedAsk& ask : issued.asks()) {
    OpenCandidate candidate{.number = ask.candidate(), .ask = ask.ask(), .runs = ask.runs_size()};
    DROVER_ASSIGN(candidate.values, study::unpack_doubles(ask.values()));
    record.asked += ask.ask() > 0 ? 1 : 0;
    record.candidates = std::max(record.candidates, ask.candidate());
    record.runs += ask.runs_size();
    for (const study::IssuedRun& run : ask.runs()) next_run = std::max(next_run, run.run() + 1);
    record.open[candidate.number] = std::move(candidate);
  }
  return absl::OkStatus();
}

void State::end_run(const dispatch::Run& run, const v1::AttemptReport* report) {
  StudyRecord* const record = study(run.study);
  if (record == nullptr) return;
  if (report != nullptr) ++record->used;
  const auto at = record->open.find(run.candidate);
  if (at == record->open.end()) return;
  ++at->second.ended;
  if (report != nullptr) at->second.results.push_back({run.condition, run.replicate, *report});
}

void State::forget_ended() {
  for (auto at = studies_.begin(); at != studies_.end();) {
    if (!at->second.final()) {
      ++at;
      continue;
    }
    book.drop_study(at->first);
    by_name_.erase(at->second.name);
    at = studies_.erase(at);
  }
}

}  // namespace drover::ledger
