// Delivery of reports: from the spool, in order, until each has its receipt.
#include <algorithm>
#include <map>
#include <utility>

#include "link/duration.h"
#include "link/status.h"
#include "link/text.h"
#include "session/conversation.h"
#include "spdlog/spdlog.h"

namespace drover::session {
namespace {

constexpr absl::Duration kLook = absl::Seconds(1);
constexpr std::size_t kMostReports = 100;      // of the contract
constexpr std::size_t kMostBytes = 768 << 10;  // a message may have 1 MiB

bool asks_for_repair(const absl::Status& status) { return absl::IsInvalidArgument(status); }

void say_received(const v1::Receipt& receipt) {
  if (receipt.reception() == v1::RECEPTION_REFUSED) {
    spdlog::warn("the coordinator keeps the report but does not count it: {} run={} attempt={} event={}",
                 receipt.reason(), receipt.run(), receipt.fence(), receipt.event());
    return;
  }
  const bool settled = receipt.reception() == v1::RECEPTION_SETTLED;
  spdlog::info("report acknowledged run={} attempt={} event={} settled={}", receipt.run(), receipt.fence(),
               receipt.event(), settled ? "yes" : "no");
}

}  // namespace

void Conversation::report_loop() {
  while (!pause_.ended()) {
    const std::optional<SessionView> session = session_.wait(kLook);
    if (!session) continue;
    parties_.outbox.wait_for_any(kLook);
    if (parties_.outbox.size() > 0 && !pause_.ended()) report_once(*session);
  }
}

// Leaves out, and takes out of `keys`, what does not fit into one message or cannot be read.
v1::ReportRequest Conversation::fill_report(const SessionView& session, std::vector<Key>& keys) {
  v1::ReportRequest request;
  request.set_request_id(options_.fresh_id());
  request.set_session(session.token);
  std::vector<Key> filled;
  std::size_t bytes = 0;
  for (const Key& key : keys) {
    absl::StatusOr<v1::AttemptReport> report = parties_.spool.report(key);
    if (!report.ok()) {
      spdlog::error("a report in the spool cannot be read and is left there: {} run={} attempt={}",
                    std::string(report.status().message()), key.run, key.fence);
      parties_.outbox.remove(key);
      continue;
    }
    bytes += report->ByteSizeLong();
    if (bytes > kMostBytes && !filled.empty()) break;
    *request.add_reports() = *std::move(report);
    filled.push_back(key);
  }
  keys = std::move(filled);
  return request;
}

void Conversation::report_once(const SessionView& session) {
  std::vector<Key> keys = parties_.outbox.batch(kMostReports);
  v1::ReportRequest request = fill_report(session, keys);
  if (keys.empty()) return;
  // The slots that these attempts held are free, and their next runs can come in the same answer.
  const int promised = may_ask() ? parties_.roster.promise() : 0;
  request.set_want(promised);
  link::Backoff backoff = fresh_backoff();
  for (;;) {
    const absl::StatusOr<v1::ReportResponse> answer = parties_.coordinator.report(request);
    if (answer.ok()) {
      sent(*answer, keys, session);
      break;
    }
    if (asks_for_repair(answer.status())) {
      refused(answer.status(), keys);
      break;
    }
    if (!repeat("Report", answer.status(), backoff, session.generation)) break;
  }
  parties_.roster.release(promised);
}

void Conversation::sent(const v1::ReportResponse& answer, const std::vector<Key>& keys, const SessionView& session) {
  const Identity known = parties_.spool.identity();
  std::vector<v1::Receipt> receipts;
  for (const v1::Receipt& receipt : answer.receipts()) {
    const Key key{receipt.run(), receipt.fence()};
    if (std::find(keys.begin(), keys.end(), key) == keys.end()) continue;  // of nothing that was sent
    if (receipt.store_id() == known.store_id && receipt.term() >= known.term) {
      receipts.push_back(receipt);
      continue;
    }
    spdlog::error(
        "a receipt is refused: it is of store {} term {}, and this worker serves store {} term {} run={} "
        "attempt={}",
        receipt.store_id(), receipt.term(), known.store_id, known.term, receipt.run(), receipt.fence());
    session_.lost(session.generation);
  }
  const absl::Status kept = parties_.spool.write_receipts(receipts);
  if (!kept.ok()) {
    // Nothing is lost: what has no receipt here is delivered again, and gets the same one.
    spdlog::error("receipts cannot be written, their reports will be sent again: {}", std::string(kept.message()));
    pause_.wait(options_.times.disk_retry);
  } else {
    for (const v1::Receipt& receipt : receipts) {
      say_received(receipt);
      parties_.hands.acknowledged({receipt.run(), receipt.fence()});
    }
  }
  take_grants(answer.grants(), session);
}

// A report that the coordinator calls malformed is not sent for ever, and must not hold up the others.
void Conversation::refused(const absl::Status& status, const std::vector<Key>& keys) {
  if (keys.size() > 1) {
    for (const Key& key : keys) parties_.outbox.isolate(key);
    return;
  }
  spdlog::error(
      "a report was refused as malformed and stays in the spool, for the next start to try again: {} run={} "
      "attempt={}",
      std::string(status.message()), keys.front().run, keys.front().fence);
  parties_.outbox.remove(keys.front());
}

}  // namespace drover::session
