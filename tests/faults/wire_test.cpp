// What is no message of ours, or too large a one, harms nobody.
#include <arpa/inet.h>
#include <grpcpp/generic/generic_stub.h>
#include <grpcpp/grpcpp.h>
#include <gtest/gtest.h>
#include <netinet/in.h>
#include <sys/socket.h>

#include <random>

#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "holdfast.grpc.pb.h"
#include "tests/support/stand_in.hpp"

namespace holdfast::coordinator {
namespace {

class WireTest : public testing::Test {
 protected:
  void SetUp() override {
    tests::seedStore(folder / "store", tests::standInPlan("sweep", 5));
    auto store = Store::open(folder / "store");
    ASSERT_TRUE(store.ok());
    auto started = Coordinator::start(std::move(*store), tests::library(), {});
    ASSERT_TRUE(started.ok());
    coordinator = std::move(*started);
    auto served = Server::start(*coordinator, tests::library(), {"127.0.0.1:0", 1});
    ASSERT_TRUE(served.ok());
    server = std::move(*served);
    channel = worker::channelTo("127.0.0.1:" + std::to_string(server->port()));
  }

  void expectStillServing() {
    grpc::ClientContext context;
    v1::ListReply reply;
    const grpc::Status status = v1::Studies::NewStub(channel)->List(&context, {}, &reply);
    EXPECT_TRUE(status.ok()) << status.error_message();
    EXPECT_EQ(reply.studies_size(), 1);
  }

  /// A unary call with any bytes at all as its request.
  std::pair<grpc::Status, std::string> callRaw(const std::string& method, const std::string& bytes) {
    grpc::GenericStub stub(channel);
    grpc::ClientContext context;
    grpc::CompletionQueue queue;
    const grpc::Slice slice(bytes);
    grpc::ByteBuffer request(&slice, 1);
    grpc::ByteBuffer reply;
    grpc::Status status;
    auto call = stub.PrepareUnaryCall(&context, method, request, &queue);
    call->StartCall();
    call->Finish(&reply, &status, this);
    void* tag = nullptr;
    bool ok = false;
    queue.Next(&tag, &ok);
    std::string text;
    std::vector<grpc::Slice> slices;
    if (status.ok() && reply.Dump(&slices).ok())
      for (const grpc::Slice& part : slices)
        text.append(reinterpret_cast<const char*>(part.begin()), part.size());
    return {status, text};
  }

  tests::TemporaryFolder folder;
  std::unique_ptr<Coordinator> coordinator;
  std::unique_ptr<Server> server;
  std::shared_ptr<grpc::Channel> channel;
};

TEST_F(WireTest, GarbageOnThePortHarmsNobody) {
  std::mt19937 random(7);
  for (int i = 0; i < 20; ++i) {
    const int connection = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);
    sockaddr_in address{};
    address.sin_family = AF_INET;
    address.sin_port = htons(static_cast<std::uint16_t>(server->port()));
    address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
    ASSERT_EQ(connect(connection, reinterpret_cast<sockaddr*>(&address), sizeof(address)), 0);
    // Half of them begin as HTTP/2 connections do (RFC 9113, section 3.4).
    std::string bytes = i % 2 == 0 ? "PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n" : "";
    for (int k = 0; k < 4096; ++k) bytes += static_cast<char>(random());
    (void)send(connection, bytes.data(), bytes.size(), MSG_NOSIGNAL);
    close(connection);
  }
  expectStillServing();
}

TEST_F(WireTest, MessageThatIsNoneIsRefused) {
  std::mt19937 random(8);
  for (const char* method : {"/holdfast.v1.Studies/Submit", "/holdfast.v1.Evaluation/Evaluate"}) {
    std::string bytes;
    for (int k = 0; k < 1000; ++k) bytes += static_cast<char>(random());
    EXPECT_FALSE(callRaw(method, bytes).first.ok()) << method;
  }
  expectStillServing();
}

TEST_F(WireTest, OversizedMessageIsRefused) {
  grpc::ClientContext context;
  v1::SubmitRequest request;
  request.set_text(std::string(9 << 20, '#'));
  v1::SubmitReply reply;
  const grpc::Status status = v1::Studies::NewStub(channel)->Submit(&context, request, &reply);
  EXPECT_EQ(status.error_code(), grpc::StatusCode::RESOURCE_EXHAUSTED) << status.error_message();
  expectStillServing();
}

TEST_F(WireTest, HealthAndReflectionAnswer) {
  // grpc.health.v1 (the gRPC health checking protocol): an empty request asks for the whole server, status 1
  // is SERVING.
  const auto [status, reply] = callRaw("/grpc.health.v1.Health/Check", "");
  EXPECT_TRUE(status.ok()) << status.error_message();
  EXPECT_EQ(reply, std::string("\x08\x01"));
  grpc::ClientContext context;
  grpc::GenericStub stub(channel);
  grpc::CompletionQueue queue;
  auto call =
      stub.PrepareCall(&context, "/grpc.reflection.v1alpha.ServerReflection/ServerReflectionInfo", &queue);
  void* tag = nullptr;
  bool ok = false;
  call->StartCall(this);
  EXPECT_TRUE(queue.Next(&tag, &ok) && ok);
  const grpc::Slice list("\x3a\x01*", 3);  // ServerReflectionRequest.list_services = "*"
  call->WriteLast(grpc::ByteBuffer(&list, 1), {}, this);
  EXPECT_TRUE(queue.Next(&tag, &ok) && ok);
  grpc::ByteBuffer answer;
  call->Read(&answer, this);
  EXPECT_TRUE(queue.Next(&tag, &ok) && ok);
  std::vector<grpc::Slice> slices;
  std::string text;
  EXPECT_TRUE(answer.Dump(&slices).ok());
  for (const grpc::Slice& part : slices)
    text.append(reinterpret_cast<const char*>(part.begin()), part.size());
  EXPECT_NE(text.find("holdfast.v1.Evaluation"), std::string::npos);
}

}  // namespace
}  // namespace holdfast::coordinator
