#include "dispatch/book.h"

#include <algorithm>
#include <utility>

namespace drover::dispatch {

bool Run::waiting() const {
  return !closed && !set_aside &&
         std::all_of(attempts.begin(), attempts.end(), [](const auto& entry) { return entry.second.released; });
}

Book::Book(const Times& times) : times_(times) {}

void Book::add_study(Study study) {
  const std::int64_t id = study.id;
  studies_[id].study = std::move(study);
}

void Book::set_granting(std::int64_t study, bool granting) {
  if (const auto at = studies_.find(study); at != studies_.end()) at->second.study.granting = granting;
}

void Book::drop_study(std::int64_t study) {
  // Attempts that are still out stay booked under their workers until they end.
  if (const auto at = studies_.find(study); at != studies_.end()) at->second.study.granting = false;
}

void Book::set_licences(std::map<std::string, std::int32_t> counts) { counts_ = std::move(counts); }

void Book::add_run(Run run) {
  Queue& queue = studies_[run.study];
  const std::int64_t id = run.id;
  for (const auto& [fence, attempt] : run.attempts) {
    hold_licences(attempt);
    attempts_by_worker_[attempt.worker].insert({id, fence});
    ++queue.out;
  }
  if (!run.closed) queue.open.insert(id);
  requeue(runs_[id] = std::move(run));
}

void Book::add_session(Session session) {
  const std::int64_t id = session.id;
  if (const auto before = by_worker_.find(session.worker); before != by_worker_.end()) {
    by_token_.erase(sessions_[before->second].token);
    sessions_.erase(before->second);
  }
  by_token_[session.token] = id;
  by_worker_[session.worker] = id;
  sessions_[id] = std::move(session);
}

void Book::start(absl::Duration now) {
  last_turn_ = now;
  no_lapse_before_ = now + times_.grace;
  for (auto& [id, session] : sessions_) session.heard = now;
}

void Book::turn(absl::Duration now) {
  const absl::Duration away = now - last_turn_;
  // The caller turns at least once a second; whatever is beyond was our own absence and no worker's silence.
  if (away > times_.late + absl::Seconds(1)) no_lapse_before_ = std::max(no_lapse_before_, now + away + times_.lease);
  last_turn_ = now;
}

void Book::heard(std::int64_t session, absl::Duration now) {
  if (const auto at = sessions_.find(session); at != sessions_.end()) {
    at->second.heard = now;
    at->second.lapsed = false;
  }
}

void Book::set_time_left(std::int64_t session, std::optional<absl::Duration> left, absl::Duration now) {
  if (const auto at = sessions_.find(session); at != sessions_.end()) {
    at->second.ends = left ? std::optional(now + *left) : std::nullopt;
  }
}

void Book::mark_lapsed(std::int64_t session) {
  if (const auto at = sessions_.find(session); at != sessions_.end()) at->second.lapsed = true;
}

void Book::keep_times_of(const Book& before) {
  last_turn_ = before.last_turn_;
  no_lapse_before_ = before.no_lapse_before_;
  for (auto& [id, session] : sessions_) {
    if (const auto at = before.sessions_.find(id); at != before.sessions_.end()) {
      session.heard = at->second.heard;
      session.lapsed = at->second.lapsed;
      session.ends = at->second.ends;
    }
  }
  for (auto& [id, run] : runs_) {
    const auto at = before.runs_.find(id);
    if (at == before.runs_.end()) continue;
    run.losses = at->second.losses;
    run.not_before = at->second.not_before;
    for (auto& [fence, attempt] : run.attempts) {
      const auto old = at->second.attempts.find(fence);
      if (old != at->second.attempts.end() && old->second.state == attempt.state) attempt.since = old->second.since;
    }
  }
}

Run* Book::find(std::int64_t id) {
  const auto at = runs_.find(id);
  return at == runs_.end() ? nullptr : &at->second;
}

Attempt* Book::find(std::int64_t run, std::int64_t fence) {
  Run* const booked = find(run);
  if (booked == nullptr) return nullptr;
  const auto at = booked->attempts.find(fence);
  return at == booked->attempts.end() ? nullptr : &at->second;
}

void Book::requeue(Run& run) {
  std::set<std::int64_t>& waiting = studies_[run.study].waiting;
  if (run.waiting()) {
    waiting.insert(run.id);
  } else {
    waiting.erase(run.id);
  }
}

void Book::forget_if_done(std::int64_t run) {
  const Run* const booked = find(run);
  if (booked != nullptr && booked->closed && booked->attempts.empty()) runs_.erase(run);
}

void Book::hold_licences(const Attempt& attempt) {
  for (const auto& [pool, n] : attempt.licences) held_[pool] += n;
}

void Book::release_licences(Attempt& attempt) {
  for (const auto& [pool, n] : attempt.licences) held_[pool] -= n;
  attempt.licences.clear();
}

}  // namespace drover::dispatch
