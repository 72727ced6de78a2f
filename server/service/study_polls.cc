#include "service/study_polls.h"

#include <utility>

namespace drover::service {

StudyPolls::~StudyPolls() { end(); }

void StudyPolls::add(std::int64_t study, absl::Duration wait, Wake wake) {
  const auto poll = std::make_shared<Poll>();
  poll->wake = std::move(wake);
  {
    const std::lock_guard lock(mutex_);
    if (!ended_) {
      polls_.emplace(study, poll);
      const auto until = std::chrono::system_clock::now() + absl::ToChronoMilliseconds(wait);
      // Fires once: in time, or at once when it is cancelled. It keeps the poll alive until then.
      poll->alarm.Set(until, [this, study, poll](bool in_time) {
        if (!in_time) return;
        {
          const std::lock_guard inner(mutex_);
          const auto [begin, end] = polls_.equal_range(study);
          for (auto at = begin; at != end; ++at) {
            if (at->second != poll) continue;
            polls_.erase(at);
            break;
          }
        }
        this->wake(poll);
      });
      return;
    }
  }
  poll->wake();
}

void StudyPolls::wake(const std::shared_ptr<Poll>& poll) {
  {
    const std::lock_guard lock(mutex_);
    if (std::exchange(poll->woken, true)) return;
  }
  poll->wake();
}

std::vector<std::shared_ptr<StudyPolls::Poll>> StudyPolls::take(std::int64_t study) {
  const std::lock_guard lock(mutex_);
  std::vector<std::shared_ptr<Poll>> taken;
  const auto [begin, end] = polls_.equal_range(study);
  for (auto at = begin; at != end; ++at) taken.push_back(at->second);
  polls_.erase(begin, end);
  return taken;
}

void StudyPolls::changed(const std::set<std::int64_t>& studies) {
  for (const std::int64_t study : studies) {
    for (const std::shared_ptr<Poll>& poll : take(study)) {
      poll->alarm.Cancel();
      wake(poll);
    }
  }
}

void StudyPolls::end() {
  std::set<std::int64_t> studies;
  {
    const std::lock_guard lock(mutex_);
    ended_ = true;
    for (const auto& [study, poll] : polls_) studies.insert(study);
  }
  changed(studies);
}

}  // namespace drover::service
