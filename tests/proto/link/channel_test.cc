#include "link/channel.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <memory>
#include <string>

#include "drover/v1/work.grpc.pb.h"
#include "link/status.h"

namespace drover::link {
namespace {

// Answers each renewal with the number of its attempts as orders, or refuses with a long list of problems.
class Echo final : public v1::Work::Service {
 public:
  grpc::Status Renew(grpc::ServerContext*, const v1::RenewRequest* request, v1::RenewResponse* answer) override {
    if (request->session() == "refuse") {
      v1::ErrorDetail detail;
      detail.set_reason("MANY");
      for (int i = 0; i < 1000; ++i) detail.add_problems()->set_text(std::string(100, 'x'));
      absl::Status status = absl::InvalidArgumentError(std::string(10'000, '\n'));
      status.SetPayload({kErrorDetailUrl.data(), kErrorDetailUrl.size()}, absl::Cord(detail.SerializeAsString()));
      return to_grpc(status);
    }
    for (int i = 0; i < request->attempts_size(); ++i) answer->add_orders();
    return grpc::Status::OK;
  }
};

struct Served {
  Echo echo;
  std::unique_ptr<grpc::Server> server;
  Address address;
};

std::unique_ptr<Served> serve(const Address& address) {
  auto served = std::make_unique<Served>();
  served->address = address;
  grpc::ServerBuilder builder;
  set_server_options(builder);
  int port = 0;
  builder.AddListeningPort(address.text(), grpc::InsecureServerCredentials(), &port);
  builder.RegisterService(&served->echo);
  served->server = builder.BuildAndStart();
  if (!address.is_unix) served->address.port = port;
  return served;
}

absl::Status renew(const std::shared_ptr<grpc::Channel>& channel, const v1::RenewRequest& request,
                   v1::RenewResponse& answer) {
  grpc::ClientContext context;
  set_deadline(context, kCallLimit);
  context.set_wait_for_ready(true);
  return from_grpc(v1::Work::NewStub(channel)->Renew(&context, request, &answer));
}

Address unix_address() {
  std::string folder = ::testing::TempDir() + "/chan-XXXXXX";
  EXPECT_NE(mkdtemp(folder.data()), nullptr);
  return {.is_unix = true, .path = folder + "/a.sock"};
}

TEST(Channel, ReachesAUnixSocketAndLoopback) {
  for (const Address& address : {unix_address(), Address{.host = "127.0.0.1", .port = 0}}) {
    const std::unique_ptr<Served> served = serve(address);
    ASSERT_NE(served->server, nullptr) << address.text();
    const auto channel = dial(served->address);
    ASSERT_TRUE(channel.ok()) << channel.status();
    v1::RenewRequest request;
    request.add_attempts();
    v1::RenewResponse answer;
    EXPECT_TRUE(renew(*channel, request, answer).ok());
    EXPECT_EQ(answer.orders_size(), 1);
  }
}

TEST(Channel, CarriesALongRefusal) {
  const std::unique_ptr<Served> served = serve(unix_address());
  const auto channel = dial(served->address);
  ASSERT_TRUE(channel.ok());
  v1::RenewRequest request;
  request.set_session("refuse");
  v1::RenewResponse answer;
  const absl::Status status = renew(*channel, request, answer);
  EXPECT_EQ(status.code(), absl::StatusCode::kInvalidArgument) << status;
  EXPECT_EQ(error_reason(status), "MANY");
}

TEST(Channel, LimitsMessages) {
  const std::unique_ptr<Served> served = serve(unix_address());
  const auto channel = dial(served->address);
  ASSERT_TRUE(channel.ok());
  v1::RenewRequest request;
  v1::RenewResponse answer;
  request.set_session(std::string(kLargestMessage - 100, 'x'));
  EXPECT_TRUE(renew(*channel, request, answer).ok());
  request.set_session(std::string(kLargestMessage + 1, 'x'));
  EXPECT_EQ(renew(*channel, request, answer).code(), absl::StatusCode::kResourceExhausted);
}

TEST(Channel, IgnoresAProxyOfTheEnvironment) {
  setenv("http_proxy", "http://127.0.0.1:1", 1);
  const std::unique_ptr<Served> served = serve({.host = "127.0.0.1", .port = 0});
  const auto channel = dial(served->address);
  ASSERT_TRUE(channel.ok());
  v1::RenewRequest request;
  v1::RenewResponse answer;
  EXPECT_TRUE(renew(*channel, request, answer).ok());
  unsetenv("http_proxy");
}

TEST(Channel, EndsACallAtItsDeadline) {
  const auto channel = dial(unix_address());  // nobody listens there
  ASSERT_TRUE(channel.ok());
  grpc::ClientContext context;
  context.set_wait_for_ready(true);
  set_deadline(context, absl::Milliseconds(50));
  v1::RenewResponse answer;
  const grpc::Status status = v1::Work::NewStub(*channel)->Renew(&context, v1::RenewRequest(), &answer);
  EXPECT_EQ(status.error_code(), grpc::StatusCode::DEADLINE_EXCEEDED);
}

TEST(Channel, RefusesOtherMachinesUntilThereAreCertificates) {
  const absl::Status status = dial({.host = "node-3.example", .port = 7777}).status();
  EXPECT_EQ(status.code(), absl::StatusCode::kUnimplemented);
  EXPECT_THAT(std::string(status.message()), ::testing::HasSubstr("certificates"));
  EXPECT_EQ(dial({.host = "127.0.0.1", .port = 0}).status().code(), absl::StatusCode::kInvalidArgument);
}

TEST(ServerOptions, LetNoSecondServerShareAPort) {
  const std::unique_ptr<Served> first = serve({.host = "127.0.0.1", .port = 0});
  ASSERT_NE(first->server, nullptr);
  EXPECT_EQ(serve(first->address)->server, nullptr);
}

}  // namespace
}  // namespace drover::link
