#include "session/daemon.h"

#include <algorithm>
#include <utility>

#include "spdlog/spdlog.h"
#include "status/try.h"

namespace drover::session {

absl::StatusOr<std::unique_ptr<Daemon>> Daemon::open(Options options, const code::Catalogue& catalogue,
                                                     Coordinator& coordinator, process::Files& files,
                                                     const link::Clock& clock) {
  DROVER_TRY(options.validate());
  std::unique_ptr<Daemon> daemon(new Daemon(std::move(options), catalogue, clock));
  DROVER_ASSIGN(daemon->spool_, Spool::open(daemon->options_.spool, files));
  DROVER_TRY(files.make_folder(daemon->options_.scratch));
  DROVER_ASSIGN(daemon->attempts_, Attempts::start({daemon->options_, catalogue, files, *daemon->spool_,
                                                    daemon->roster_, daemon->outbox_, clock}));
  std::vector<v1::CodeDefinition> codes;
  for (const code::Definition& definition : catalogue.codes) codes.push_back(definition.to_proto());
  const Parties parties{coordinator, *daemon->spool_, daemon->roster_, daemon->outbox_, *daemon->attempts_, clock};
  daemon->conversation_ = std::make_unique<Conversation>(daemon->options_, std::move(codes), parties);
  return daemon;
}

Daemon::~Daemon() {
  if (conversation_) conversation_->end();
  for (std::thread& loop : loops_) loop.join();
  attempts_.reset();  // before the conversation: none of its threads is left to call it
}

absl::Status Daemon::run() {
  attempts_->recover();
  if (const absl::Status status = conversation_->enrol(); !status.ok()) {
    const std::lock_guard lock(mutex_);
    return stopping_ ? absl::OkStatus() : status;
  }
  converse();
  wait_for_stop();
  if (!dropped()) end_in_order();
  return absl::OkStatus();
}

void Daemon::converse() {
  const std::lock_guard lock(mutex_);
  enrolled_ = true;
  if (stopping_) return;
  loops_.emplace_back([this] { conversation_->lease_loop(); });
  loops_.emplace_back([this] { conversation_->renew_loop(); });
  loops_.emplace_back([this] { conversation_->report_loop(); });
}

void Daemon::stop() {
  const std::lock_guard lock(mutex_);
  stopping_ = true;
  changed_.notify_all();
  if (!enrolled_) conversation_->end();  // or it might try to enrol for ever
}

void Daemon::drop_for_test() {
  conversation_->end();
  const std::lock_guard lock(mutex_);
  stopping_ = dropped_ = true;
  changed_.notify_all();
}

bool Daemon::dropped() {
  const std::lock_guard lock(mutex_);
  return dropped_;
}

void Daemon::wait_for_stop() {
  std::unique_lock lock(mutex_);
  while (!stopping_) {
    lock.unlock();
    if (const int removed = spool_->prune(options_.retention, clock_.wall()); removed > 0) {
      spdlog::info("{} delivered entries were removed from the spool", removed);
    }
    lock.lock();
    changed_.wait_for(lock, absl::ToChronoNanoseconds(options_.times.prune_every), [this] { return stopping_; });
  }
}

absl::Duration Daemon::longest_grace() const {
  absl::Duration longest = absl::ZeroDuration();
  for (const code::Definition& definition : catalogue_.codes) longest = std::max(longest, definition.grace);
  return longest;
}

void Daemon::end_in_order() {
  attempts_->close();
  conversation_->end_leases(options_.times.farewell);
  attempts_->stop_all();
  if (!roster_.wait_until_idle(longest_grace() + options_.times.stop_margin)) {
    spdlog::warn("{} simulations did not end in time; the next start of this worker looks after them",
                 roster_.occupied());
  }
  if (!outbox_.wait_until_empty(options_.times.farewell)) {
    spdlog::info("{} reports wait in the spool for the next start", outbox_.size());
  }
  conversation_->end();
  for (std::thread& loop : loops_) loop.join();
  loops_.clear();
}

}  // namespace drover::session
