#include "service/work_service.h"

#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/durations.h"
#include "ledger/handlers.h"
#include "service/reply.h"
#include "service/request_digest.h"

namespace drover::service {
namespace {

// Until certificates name who calls, every caller of this service is a worker.
constexpr char kPrincipal[] = "worker";

absl::Status check_id(const std::string& request_id) {
  if (request_id.size() >= 8 && request_id.size() <= 128) return absl::OkStatus();
  return absl::InvalidArgumentError("request_id: 8 to 128 characters are needed, unique for each new request");
}

template <class Request, class Response>
ledger::Call call_of(const Request& request, std::string digest, Reply<Response>* reply,
                     std::function<absl::StatusOr<Response>(ledger::Turn&, const Request&)> handler) {
  ledger::Call call = ledger::make_call<Request, Response>(
      request, request.request_id(), kPrincipal, std::move(digest), std::move(handler),
      [reply](absl::StatusOr<Response> answer) { reply->finish(std::move(answer)); });
  return call;
}

}  // namespace

WorkService::WorkService(ledger::Ledger& ledger, std::function<std::string()> fresh_token)
    : ledger_(ledger), fresh_token_(std::move(fresh_token)) {}

grpc::ServerUnaryReactor* WorkService::Enrol(grpc::CallbackServerContext*, const v1::EnrolRequest* request,
                                             v1::EnrolResponse* response) {
  auto* const reply = new Reply<v1::EnrolResponse>(response);
  if (const absl::Status bad = check_id(request->request_id()); !bad.ok()) {
    reply->finish(bad);
    return reply;
  }
  ledger_.submit(call_of<v1::EnrolRequest, v1::EnrolResponse>(
      *request, request_digest(*request), reply,
      [token = fresh_token_()](ledger::Turn& turn, const v1::EnrolRequest& asked) {
        return ledger::enrol(turn, asked, token);
      }));
  return reply;
}

grpc::ServerUnaryReactor* WorkService::Lease(grpc::CallbackServerContext*, const v1::LeaseRequest* request,
                                             v1::LeaseResponse* response) {
  auto* const reply = new Reply<v1::LeaseResponse>(response);
  if (const absl::Status bad = check_id(request->request_id()); !bad.ok()) {
    reply->finish(bad);
    return reply;
  }
  v1::LeaseRequest content = *request;  // how long it may still wait is no part of what is asked
  content.clear_wait();
  content.clear_time_left();
  ledger::Call call = call_of<v1::LeaseRequest, v1::LeaseResponse>(*request, request_digest(content), reply,
                                                                  ledger::lease);
  call.wait = ledger::to_duration(request->wait());
  call.gone = reply->gone();
  call.empty_handed = [](const std::string& bytes) { return bytes.empty(); };
  ledger_.submit(std::move(call));
  return reply;
}

grpc::ServerUnaryReactor* WorkService::Renew(grpc::CallbackServerContext*, const v1::RenewRequest* request,
                                             v1::RenewResponse* response) {
  auto* const reply = new Reply<v1::RenewResponse>(response);
  ledger_.submit(ledger::make_call<v1::RenewRequest, v1::RenewResponse>(
      *request, "", kPrincipal, "", ledger::renew,
      [reply](absl::StatusOr<v1::RenewResponse> answer) { reply->finish(std::move(answer)); }));
  return reply;
}

grpc::ServerUnaryReactor* WorkService::Report(grpc::CallbackServerContext*, const v1::ReportRequest* request,
                                              v1::ReportResponse* response) {
  auto* const reply = new Reply<v1::ReportResponse>(response);
  if (const absl::Status bad = check_id(request->request_id()); !bad.ok()) {
    reply->finish(bad);
    return reply;
  }
  v1::ReportRequest content = *request;
  content.clear_time_left();
  ledger_.submit(call_of<v1::ReportRequest, v1::ReportResponse>(*request, request_digest(content), reply,
                                                               ledger::report));
  return reply;
}

}  // namespace drover::service
