// The same request id gives the same bytes, also from the coordinator that starts after kill -9.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "drover/v1/studies.grpc.pb.h"
#include "drover/v1/work.grpc.pb.h"
#include "system/coordinator_process.h"

namespace drover::system_test {
namespace {

v1::EnrolRequest enrolment() {
  v1::EnrolRequest request;
  request.set_request_id("enrol-0000001");
  request.set_worker("w1");
  request.set_host("here");
  request.set_incarnation(1);
  request.set_slots(4);
  request.set_roll_call_complete(true);
  v1::CodeDefinition& code = *request.add_codes();
  code.set_name("hill");
  code.set_version("1");
  code.set_digest("aa");
  code.add_accepts()->set_name("x");
  code.add_outputs()->set_name("height");
  code.set_cores(1);
  code.mutable_time_limit()->set_seconds(60);
  code.mutable_grace()->set_seconds(1);
  return request;
}

v1::StartStudyRequest study() {
  v1::StartStudyRequest request;
  request.set_request_id("start-0000001");
  v1::StudySpec& spec = *request.mutable_spec();
  spec.set_name("hill");
  spec.add_codes()->set_code("hill");
  v1::Variable& x = *spec.add_variables();
  x.set_name("x");
  x.set_kind(v1::VARIABLE_KIND_REAL);
  x.set_low(0);
  x.set_high(1);
  spec.add_objectives()->set_name("height");
  spec.mutable_budget()->set_runs(4);
  return request;
}

// One call over a channel of its own.
template <class Stub, class Request, class Response>
grpc::Status call(const CoordinatorProcess& process,
                  grpc::Status (Stub::*method)(grpc::ClientContext*, const Request&, Response*), Stub& stub,
                  const Request& request, Response& response) {
  static_cast<void>(process);
  grpc::ClientContext context;
  context.set_deadline(std::chrono::system_clock::now() + std::chrono::seconds(30));
  return (stub.*method)(&context, request, &response);
}

class SameAnswer : public testing::Test {
 protected:
  void SetUp() override {
    process_.start();
    ASSERT_TRUE(process_.ok());
    connect();
  }
  void connect() {
    work_ = v1::Work::NewStub(process_.channel());
    studies_ = v1::Studies::NewStub(process_.channel());
  }
  void kill_and_start() {
    process_.kill();
    process_.start();
    ASSERT_TRUE(process_.ok());
    connect();
  }
  template <class Request, class Response>
  Response work(grpc::Status (v1::Work::Stub::*method)(grpc::ClientContext*, const Request&, Response*),
                const Request& request) {
    Response response;
    const grpc::Status status = call(process_, method, *work_, request, response);
    EXPECT_TRUE(status.ok()) << status.error_message();
    return response;
  }
  v1::LeaseRequest lease(const std::string& session, const std::string& id) {
    v1::LeaseRequest request;
    request.set_request_id(id);
    request.set_session(session);
    request.set_want(2);
    request.mutable_wait()->set_seconds(20);
    return request;
  }

  CoordinatorProcess process_;
  std::unique_ptr<v1::Work::Stub> work_;
  std::unique_ptr<v1::Studies::Stub> studies_;
};

TEST_F(SameAnswer, ComesAgainAfterAKill) {
  const auto enrolled = work(&v1::Work::Stub::Enrol, enrolment());
  v1::Study started;
  grpc::ClientContext context;
  const grpc::Status status = studies_->StartStudy(&context, study(), &started);
  ASSERT_TRUE(status.ok()) << status.error_message();
  const auto granted = work(&v1::Work::Stub::Lease, lease(enrolled.session(), "lease-0000001"));
  ASSERT_EQ(granted.grants_size(), 2);
  v1::ReportRequest reports;
  reports.set_request_id("report-000001");
  reports.set_session(enrolled.session());
  v1::AttemptReport& report = *reports.add_reports();
  report.set_run(granted.grants(0).run());
  report.set_fence(granted.grants(0).fence());
  report.set_input_digest(granted.grants(0).input_digest());
  report.set_ending(v1::ENDING_EVALUATED);
  report.add_outputs()->set_name("height");
  report.mutable_outputs(0)->set_value(-0.0);
  const auto received = work(&v1::Work::Stub::Report, reports);
  ASSERT_EQ(received.receipts_size(), 1);
  EXPECT_EQ(received.receipts(0).reception(), v1::RECEPTION_SETTLED);

  kill_and_start();

  EXPECT_EQ(work(&v1::Work::Stub::Enrol, enrolment()).SerializeAsString(), enrolled.SerializeAsString());
  EXPECT_EQ(work(&v1::Work::Stub::Lease, lease(enrolled.session(), "lease-0000001")).SerializeAsString(),
            granted.SerializeAsString());
  EXPECT_EQ(work(&v1::Work::Stub::Report, reports).SerializeAsString(), received.SerializeAsString());
  v1::Study again;
  grpc::ClientContext second;
  ASSERT_TRUE(studies_->StartStudy(&second, study(), &again).ok());
  EXPECT_EQ(again.SerializeAsString(), started.SerializeAsString());
}

TEST_F(SameAnswer, IsRefusedToOtherContentUnderTheSameId) {
  const auto enrolled = work(&v1::Work::Stub::Enrol, enrolment());
  v1::EnrolRequest other = enrolment();
  other.set_slots(5);
  v1::EnrolResponse response;
  const grpc::Status status = call(process_, &v1::Work::Stub::Enrol, *work_, other, response);
  EXPECT_EQ(status.error_code(), grpc::StatusCode::ALREADY_EXISTS);
}

TEST_F(SameAnswer, OfAReportUnderAnotherIdIsTheSameReceipt) {
  const auto enrolled = work(&v1::Work::Stub::Enrol, enrolment());
  v1::Study started;
  grpc::ClientContext context;
  ASSERT_TRUE(studies_->StartStudy(&context, study(), &started).ok());
  const auto granted = work(&v1::Work::Stub::Lease, lease(enrolled.session(), "lease-0000001"));
  ASSERT_GE(granted.grants_size(), 1);
  v1::ReportRequest reports;
  reports.set_session(enrolled.session());
  v1::AttemptReport& report = *reports.add_reports();
  report.set_run(granted.grants(0).run());
  report.set_fence(granted.grants(0).fence());
  report.set_input_digest(granted.grants(0).input_digest());
  report.set_ending(v1::ENDING_FAILED);
  report.set_failure(v1::FAILURE_KIND_CODE);
  reports.set_request_id("report-000001");
  const auto first = work(&v1::Work::Stub::Report, reports);
  reports.set_request_id("report-000002");
  const auto second = work(&v1::Work::Stub::Report, reports);
  EXPECT_EQ(second.receipts(0).SerializeAsString(), first.receipts(0).SerializeAsString());
}

TEST_F(SameAnswer, ComesUnderATermThatEachStartRaises) {
  kill_and_start();
  v1::Coordinator coordinator;
  grpc::ClientContext context;
  ASSERT_TRUE(studies_->GetCoordinator(&context, {}, &coordinator).ok());
  EXPECT_EQ(coordinator.term(), 2);
}

}  // namespace
}  // namespace drover::system_test
