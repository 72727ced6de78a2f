// A book with one study, and events in few words.
#pragma once

#include <cstdint>
#include <map>
#include <string>
#include <utility>

#include "dispatch/book.h"

namespace drover::dispatch {

inline Session worker(std::int64_t id, const std::string& name, int slots = 2) {
  return {.id = id, .token = "token " + name, .worker = name, .slots = slots, .code_digests = {"c0de"}};
}

inline Study study_of(std::int64_t id, std::int32_t priority = 0, std::map<std::string, std::int32_t> licences = {}) {
  return {.id = id,
          .priority = priority,
          .granting = true,
          .code_digests = {"c0de"},
          .licences = {std::move(licences)},
          .time_limits = {absl::Minutes(10)}};
}

inline Run run_of(std::int64_t id, std::int64_t study = 1) {
  return {.id = id, .study = study, .number = id, .candidate = id};
}

inline study::Event granted(std::int64_t run, std::int64_t fence, std::int64_t session,
                            const std::map<std::string, std::int32_t>& licences = {}) {
  study::Event event;
  event.set_study(1);
  event.mutable_granted()->set_run(run);
  event.mutable_granted()->set_fence(fence);
  event.mutable_granted()->set_session(session);
  event.mutable_granted()->mutable_licences()->insert(licences.begin(), licences.end());
  return event;
}

inline study::Event parked(std::int64_t run, std::int64_t fence) {
  study::Event event;
  event.mutable_parked()->set_run(run);
  event.mutable_parked()->set_fence(fence);
  return event;
}

inline study::Event released(std::int64_t run, std::int64_t fence) {
  study::Event event;
  event.mutable_released()->set_run(run);
  event.mutable_released()->set_fence(fence);
  return event;
}

inline study::Event settled(std::int64_t run, std::int64_t fence) {
  study::Event event;
  event.mutable_settled()->set_run(run);
  event.mutable_settled()->set_fence(fence);
  return event;
}

inline study::Event lost(std::int64_t run, std::int64_t fence, v1::LossReason why, bool abnormal = false) {
  study::Event event;
  event.mutable_attempt_lost()->set_run(run);
  event.mutable_attempt_lost()->set_fence(fence);
  event.mutable_attempt_lost()->mutable_report()->set_loss(why);
  event.mutable_attempt_lost()->mutable_report()->set_abnormal(abnormal);
  return event;
}

}  // namespace drover::dispatch
