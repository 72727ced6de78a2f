// What other threads may ask of the ledger: copies made after each commit.
#include <utility>

#include "ledger/durations.h"
#include "ledger/ledger.h"

namespace drover::ledger {

void Ledger::publish() {
  std::map<std::int64_t, study::Standing> standings;
  std::map<std::int64_t, StudyFigures> figures;
  for (const auto& [id, record] : state_->studies()) {
    if (record.final()) continue;
    standings[id] = state_->standing(record, now_.wall);
    figures[id] = {state_->book.busy_workers(id), state_->book.slots_for(id)};
  }
  std::map<std::string, v1::Worker> workers;
  for (const auto& [id, session] : state_->book.sessions()) {
    v1::Worker& worker = workers[session.worker];
    worker.set_name(session.worker);
    worker.set_host(session.host);
    worker.set_version(session.version);
    worker.set_slots(session.slots);
    worker.set_busy(session.slots - state_->book.free_slots(id));
    worker.set_silent(session.lapsed);
    set(*worker.mutable_heard(), now_.steady - session.heard);
    for (const std::string& digest : session.code_digests) {
      const v1::CodeDefinition* const code = state_->code(digest);
      if (code != nullptr) worker.add_codes(code->name());
    }
    for (const std::string& tag : session.tags) worker.add_tags(tag);
    worker.set_fleet_job(session.fleet_job);
  }
  v1::Coordinator coordinator;
  coordinator.set_version(options_.version);
  coordinator.set_store_id(store_->store_id());
  coordinator.set_term(store_->term());
  coordinator.mutable_start_time()->set_seconds(absl::ToUnixSeconds(started_));
  coordinator.set_events(store_->head().number);
  for (const auto& [name, count] : state_->book.licence_counts()) {
    v1::LicencePool& pool = *coordinator.add_licences();
    pool.set_name(name);
    pool.set_count(count);
    pool.set_held(state_->book.held(name));
  }
  std::vector<v1::CodeDefinition> codes = state_->live_codes();
  const std::lock_guard lock(published_mutex_);
  standings_ = std::move(standings);
  figures_ = std::move(figures);
  workers_ = std::move(workers);
  codes_ = std::move(codes);
  coordinator_ = std::move(coordinator);
}

std::optional<study::Standing> Ledger::standing(std::int64_t study) const {
  const std::lock_guard lock(published_mutex_);
  const auto at = standings_.find(study);
  return at == standings_.end() ? std::nullopt : std::optional(at->second);
}

std::vector<std::int64_t> Ledger::open_studies() const {
  const std::lock_guard lock(published_mutex_);
  std::vector<std::int64_t> studies;
  for (const auto& [id, standing] : standings_) studies.push_back(id);
  return studies;
}

Ledger::StudyFigures Ledger::figures(std::int64_t study) const {
  const std::lock_guard lock(published_mutex_);
  const auto at = figures_.find(study);
  return at == figures_.end() ? StudyFigures{} : at->second;
}

std::vector<v1::Worker> Ledger::workers() const {
  const std::lock_guard lock(published_mutex_);
  std::vector<v1::Worker> workers;
  for (const auto& [name, worker] : workers_) workers.push_back(worker);
  return workers;
}

std::vector<v1::CodeDefinition> Ledger::codes() const {
  const std::lock_guard lock(published_mutex_);
  return codes_;
}

v1::Coordinator Ledger::coordinator() const {
  const std::lock_guard lock(published_mutex_);
  return coordinator_;
}

}  // namespace drover::ledger
