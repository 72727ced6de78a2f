// What workers ask: translation to the ledger and back, nothing else.
#pragma once

#include <functional>
#include <string>

#include "drover/v1/work.grpc.pb.h"
#include "ledger/ledger.h"

namespace drover::service {

// Borrows the ledger, which must outlive the server's shutdown. No call blocks a gRPC thread.
class WorkService final : public v1::Work::CallbackService {
 public:
  WorkService(ledger::Ledger& ledger, std::function<std::string()> fresh_token);

  grpc::ServerUnaryReactor* Enrol(grpc::CallbackServerContext* context, const v1::EnrolRequest* request,
                                  v1::EnrolResponse* response) override;
  grpc::ServerUnaryReactor* Lease(grpc::CallbackServerContext* context, const v1::LeaseRequest* request,
                                  v1::LeaseResponse* response) override;
  grpc::ServerUnaryReactor* Renew(grpc::CallbackServerContext* context, const v1::RenewRequest* request,
                                  v1::RenewResponse* response) override;
  grpc::ServerUnaryReactor* Report(grpc::CallbackServerContext* context, const v1::ReportRequest* request,
                                   v1::ReportResponse* response) override;

 private:
  ledger::Ledger& ledger_;
  std::function<std::string()> fresh_token_;
};

}  // namespace drover::service
