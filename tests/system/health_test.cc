// The health service of gRPC (grpc.health.v1), which balancers and init systems ask.
#include <grpcpp/generic/generic_stub.h>
#include <gtest/gtest.h>

#include "system/coordinator_process.h"

namespace drover::system_test {
namespace {

// HealthCheckResponse.status of `service`, read off the wire: field 1, a varint (grpc/health/v1/health.proto: 1
// SERVING, 2 NOT_SERVING). -1: the call failed.
int status_of(const std::shared_ptr<grpc::Channel>& channel, const std::string& service) {
  std::string request;
  if (!service.empty()) request = std::string("\x0a") + static_cast<char>(service.size()) + service;
  const grpc::Slice slice(request);
  const grpc::ByteBuffer sent(&slice, 1);
  grpc::GenericStub stub(channel);
  grpc::ClientContext context;
  grpc::CompletionQueue queue;
  grpc::ByteBuffer received;
  grpc::Status status;
  auto call = stub.PrepareUnaryCall(&context, "/grpc.health.v1.Health/Check", sent, &queue);
  call->StartCall();
  call->Finish(&received, &status, nullptr);
  void* tag = nullptr;
  bool ok = false;
  queue.Next(&tag, &ok);
  std::vector<grpc::Slice> slices;
  if (!status.ok() || !received.Dump(&slices).ok() || slices.empty() || slices[0].size() < 2) return -1;
  return slices[0].begin()[1];
}

TEST(Health, SaysServingForTheWholeAndForEachService) {
  CoordinatorProcess process;
  process.start();
  ASSERT_TRUE(process.ok());
  for (const char* const service : {"", "drover.v1.Work", "drover.v1.Studies"}) {
    EXPECT_EQ(status_of(process.channel(), service), 1) << service;
  }
  EXPECT_EQ(status_of(process.channel(), "no.such.Service"), -1);
}

}  // namespace
}  // namespace drover::system_test
