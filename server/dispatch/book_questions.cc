// What can be asked of the book. Nothing in here changes anything.
#include <algorithm>
#include <limits>
#include <tuple>

#include "dispatch/book.h"

namespace drover::dispatch {
namespace {

constexpr std::size_t kWorkersUntilSetAside = 3;

}  // namespace

std::optional<std::int64_t> Book::pick(std::int64_t session, absl::Duration now) const {
  const auto asking = sessions_.find(session);
  if (asking == sessions_.end()) return std::nullopt;
  std::optional<std::int64_t> best;
  std::tuple<std::int32_t, int, std::int64_t> best_rank;
  for (const auto& [id, queue] : studies_) {
    if (!queue.study.granting || queue.waiting.empty()) continue;
    const std::tuple rank{-queue.study.priority, queue.out, id};
    if (best && best_rank <= rank) continue;
    const auto at = std::find_if(queue.waiting.begin(), queue.waiting.end(), [&](std::int64_t run) {
      return may_run(asking->second, queue.study, runs_.at(run), now);
    });
    if (at == queue.waiting.end()) continue;
    best = *at;
    best_rank = rank;
  }
  return best;
}

bool Book::may_run(const Session& session, const Study& study, const Run& run, absl::Duration now) const {
  const auto code = static_cast<std::size_t>(run.code);
  if (!session.code_digests.contains(study.code_digests[code]) || now < run.not_before) return false;
  if (!std::all_of(study.tags.begin(), study.tags.end(),
                   [&](const std::string& tag) { return session.tags.contains(tag); })) {
    return false;
  }
  if (session.ends && now + study.time_limits[code] > *session.ends) return false;
  // A silent attempt of the same worker may still be running in its folder.
  if (std::any_of(run.attempts.begin(), run.attempts.end(),
                  [&](const auto& entry) { return entry.second.worker == session.worker; })) {
    return false;
  }
  return licences_free(study.licences[code]);
}

bool Book::licences_free(const std::map<std::string, std::int32_t>& wanted) const {
  return std::all_of(wanted.begin(), wanted.end(), [&](const auto& entry) {
    const auto pool = counts_.find(entry.first);
    return pool == counts_.end() || held(entry.first) + entry.second <= pool->second;  // no such pool: not counted
  });
}

std::int32_t Book::held(const std::string& pool) const {
  const auto at = held_.find(pool);
  return at == held_.end() ? 0 : at->second;
}

std::int32_t Book::free_slots(std::int64_t session) const {
  const auto at = sessions_.find(session);
  if (at == sessions_.end()) return 0;
  const auto out = attempts_by_worker_.find(at->second.worker);
  const std::size_t busy = out == attempts_by_worker_.end() ? 0 : out->second.size();
  return std::max(0, at->second.slots - static_cast<std::int32_t>(busy));
}

std::vector<std::int64_t> Book::lapsed(absl::Duration now) const {
  std::vector<std::int64_t> silent;
  if (now < no_lapse_before_) return silent;
  for (const auto& [id, session] : sessions_) {
    if (!session.lapsed && now - session.heard > times_.lease) silent.push_back(id);
  }
  return silent;
}

std::vector<Key> Book::impatient(absl::Duration now) const {
  std::vector<Key> keys;
  for (const auto& [worker, attempts] : attempts_by_worker_) {
    for (const Key& key : attempts) {
      const Attempt& attempt = runs_.at(key.run).attempts.at(key.fence);
      const Session* const holder = session_of_worker(worker);
      const bool silent = holder == nullptr || holder->lapsed;
      const bool parked = attempt.state == Attempt::State::kParked || attempt.state == Attempt::State::kStopping;
      if (silent && parked && !attempt.released && now - attempt.since > patience(studies_.at(runs_.at(key.run).study)))
        keys.push_back(key);
    }
  }
  std::sort(keys.begin(), keys.end());
  return keys;
}

absl::Duration Book::patience(const Queue& queue) const {
  if (queue.recent.empty()) return times_.patience;
  std::vector<absl::Duration> sorted(queue.recent.begin(), queue.recent.end());
  std::sort(sorted.begin(), sorted.end());
  return std::max(times_.patience, sorted[sorted.size() * 9 / 10]);
}

std::vector<Key> Book::overdue_licences(absl::Duration now) const {
  std::vector<Key> keys;
  for (const auto& [worker, attempts] : attempts_by_worker_) {
    const Session* const holder = session_of_worker(worker);
    if (holder != nullptr && !holder->lapsed) continue;
    for (const Key& key : attempts) {
      const Run& run = runs_.at(key.run);
      const Attempt& attempt = run.attempts.at(key.fence);
      const Study& study = studies_.at(run.study).study;
      // Counted from the last change of state, which is after the grant: on the safe side.
      const absl::Duration limit = study.time_limits[static_cast<std::size_t>(run.code)];
      if (!attempt.licences.empty() && now - attempt.since > limit) keys.push_back(key);
    }
  }
  std::sort(keys.begin(), keys.end());
  return keys;
}

bool Book::poisonous(const Run& run) const { return run.abnormal_on.size() >= kWorkersUntilSetAside; }

const Run* Book::run(std::int64_t id) const {
  const auto at = runs_.find(id);
  return at == runs_.end() ? nullptr : &at->second;
}

const Session* Book::session(std::int64_t id) const {
  const auto at = sessions_.find(id);
  return at == sessions_.end() ? nullptr : &at->second;
}

const Session* Book::session_by_token(const std::string& token) const {
  const auto at = by_token_.find(token);
  return at == by_token_.end() ? nullptr : session(at->second);
}

const Session* Book::session_of_worker(const std::string& worker) const {
  const auto at = by_worker_.find(worker);
  return at == by_worker_.end() ? nullptr : session(at->second);
}

std::vector<Key> Book::attempts_of_worker(const std::string& worker) const {
  const auto at = attempts_by_worker_.find(worker);
  return at == attempts_by_worker_.end() ? std::vector<Key>{} : std::vector<Key>{at->second.begin(), at->second.end()};
}

std::vector<std::int64_t> Book::open_runs(std::int64_t study) const {
  const auto at = studies_.find(study);
  return at == studies_.end() ? std::vector<std::int64_t>{}
                              : std::vector<std::int64_t>{at->second.open.begin(), at->second.open.end()};
}

std::int64_t Book::open_count(std::int64_t study) const {
  const auto at = studies_.find(study);
  return at == studies_.end() ? 0 : static_cast<std::int64_t>(at->second.open.size());
}

std::int64_t Book::set_aside_count(std::int64_t study) const {
  const auto at = studies_.find(study);
  if (at == studies_.end()) return 0;
  return std::count_if(at->second.open.begin(), at->second.open.end(),
                       [&](std::int64_t run) { return runs_.at(run).set_aside; });
}

std::int32_t Book::slots_for(std::int64_t study) const {
  const auto at = studies_.find(study);
  if (at == studies_.end()) return 0;
  const Study& wanted = at->second.study;
  std::int32_t slots = 0;
  for (const auto& [id, session] : sessions_) {
    const bool has_code = std::any_of(
        wanted.code_digests.begin(), wanted.code_digests.end(),
        [&, &session = session](const std::string& digest) { return session.code_digests.contains(digest); });
    if (has_code && !session.lapsed) slots += session.slots;
  }
  return slots;
}

std::int32_t Book::busy_workers(std::int64_t study) const {
  return static_cast<std::int32_t>(
      std::count_if(attempts_by_worker_.begin(), attempts_by_worker_.end(), [&](const auto& entry) {
        return std::any_of(entry.second.begin(), entry.second.end(),
                           [&](const Key& key) { return runs_.at(key.run).study == study; });
      }));
}

}  // namespace drover::dispatch
