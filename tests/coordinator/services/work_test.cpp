// Workers and the coordinator over real gRPC streams, with a stand-in for the thermodynamics.
#include <gmock/gmock.h>
#include <grpcpp/grpcpp.h>
#include <gtest/gtest.h>

#include <atomic>
#include <thread>

#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "holdfast.grpc.pb.h"
#include "tests/support/stand_in.hpp"

namespace holdfast::coordinator {
namespace {

using namespace std::chrono_literals;
using testing::HasSubstr;
using tests::faultsOf;
using tests::standIn;

/// A worker that a test writes line by line.
class HandWorker {
 public:
  explicit HandWorker(const std::shared_ptr<grpc::Channel>& channel)
      : stub_(v1::Work::NewStub(channel)), stream_(stub_->Join(&context_)) {}

  static v1::Hello hello() {
    v1::Hello hello;
    hello.set_build(std::string(buildIdentity()));
    hello.set_data_digest(tests::library()->digest());
    hello.set_worker("by hand");
    hello.set_threads(1);
    hello.set_processor("baseline");
    return hello;
  }
  void say(const v1::Hello& hello) {
    v1::FromWorker message;
    *message.mutable_hello() = hello;
    stream_->Write(message);
  }
  void say(v1::JobResult result) {
    v1::FromWorker message;
    *message.mutable_result() = std::move(result);
    stream_->Write(message);
  }
  /// Reads on to the next lease.
  v1::Lease lease() {
    v1::ToWorker message;
    while (stream_->Read(&message))
      if (message.has_lease()) return message.lease();
    return {};
  }
  bool readsUntil(v1::ToWorker::WhatCase what) {
    v1::ToWorker message;
    while (stream_->Read(&message))
      if (message.what_case() == what) return true;
    return false;
  }
  void vanish() { context_.TryCancel(); }
  grpc::Status end() {
    v1::ToWorker message;
    while (stream_->Read(&message)) {
    }
    return stream_->Finish();
  }

 private:
  grpc::ClientContext context_;
  std::unique_ptr<v1::Work::Stub> stub_;
  std::unique_ptr<grpc::ClientReaderWriter<v1::FromWorker, v1::ToWorker>> stream_;
};

/// A worker as the product has it, on a thread.
class ThreadWorker {
 public:
  ThreadWorker(std::shared_ptr<grpc::Channel> channel, worker::Prepare prepare, unsigned threads = 2)
      : thread_([this, channel = std::move(channel), prepare = std::move(prepare), threads] {
          status = worker::serve(channel, tests::library(), {"a thread", threads, prepare}, leaving);
        }) {}
  ~ThreadWorker() { stop(); }
  void stop() {
    leaving.soon = true;
    if (thread_.joinable()) thread_.join();
  }
  worker::Leaving leaving;
  Status status = success();

 private:
  std::thread thread_;
};

class WorkTest : public testing::Test {
 protected:
  void begin(int temperatures = 50, QueuePolicy policy = {}) {
    plan = tests::standInPlan("sweep", temperatures);
    tests::seedStore(folder / "store", plan);
    policy_ = policy;
    start();
  }
  void start() {
    auto store = Store::open(folder / "store");
    ASSERT_TRUE(store.ok()) << store.error().message;
    CoordinatorOptions options;
    options.policy = policy_;
    auto started = Coordinator::start(std::move(*store), tests::library(), options);
    ASSERT_TRUE(started.ok()) << started.error().message;
    coordinator = std::move(*started);
    auto served = Server::start(*coordinator, tests::library(), {"127.0.0.1:" + std::to_string(port), 1});
    ASSERT_TRUE(served.ok()) << served.error().message;
    server = std::move(*served);
    port = server->port();
  }
  void end() {
    server.reset();
    coordinator.reset();
  }
  std::shared_ptr<grpc::Channel> channel() const {
    return worker::channelTo("127.0.0.1:" + std::to_string(port));
  }
  v1::Progress finished() {
    v1::Progress progress = *coordinator->await("sweep", 30s);
    EXPECT_EQ(progress.state(), "complete");
    return progress;
  }

  tests::TemporaryFolder folder;
  QueuePolicy policy_;
  v1::Plan plan;
  int port = 0;
  std::unique_ptr<Coordinator> coordinator;
  std::unique_ptr<Server> server;
};

TEST_F(WorkTest, EveryPointLandsOnceWithItsValues) {
  begin();
  const ThreadWorker worker(channel(), standIn());
  EXPECT_EQ(finished().points_done(), plan.points());
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, SeveralWorkersShareAStudyAlsoInProcess) {
  begin(200);
  {
    const ThreadWorker first(channel(), standIn(), 1);
    const ThreadWorker second(channel(), standIn(), 3);
    const ThreadWorker third(server->inProcessChannel(), standIn());
    finished();
  }
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, AnotherBuildIsRefusedAndBothAreNamed) {
  begin(1);
  HandWorker worker(channel());
  v1::Hello hello = HandWorker::hello();
  hello.set_build("0.0.1+old");
  worker.say(hello);
  const grpc::Status status = worker.end();
  EXPECT_EQ(status.error_code(), grpc::StatusCode::FAILED_PRECONDITION);
  EXPECT_THAT(status.error_message(), HasSubstr("0.0.1+old"));
  EXPECT_THAT(status.error_message(), HasSubstr(std::string(buildIdentity())));
}

TEST_F(WorkTest, OtherFluidDataAreRefusedAndBothAreNamed) {
  begin(1);
  HandWorker worker(channel());
  v1::Hello hello = HandWorker::hello();
  hello.set_data_digest("abc123");
  worker.say(hello);
  const grpc::Status status = worker.end();
  EXPECT_EQ(status.error_code(), grpc::StatusCode::FAILED_PRECONDITION);
  EXPECT_THAT(status.error_message(), HasSubstr("abc123"));
  EXPECT_THAT(status.error_message(), HasSubstr(tests::library()->digest()));
}

TEST_F(WorkTest, FirstMessageMustBeHello) {
  begin(1);
  HandWorker worker(channel());
  worker.say(v1::JobResult{});
  EXPECT_EQ(worker.end().error_code(), grpc::StatusCode::INVALID_ARGUMENT);
}

TEST_F(WorkTest, ResultIsAcknowledgedWhenItIsInTheStore) {
  begin(1);
  HandWorker worker(channel());
  worker.say(HandWorker::hello());
  const v1::Lease lease = worker.lease();
  v1::JobResult result = tests::standInResult(lease.jobs(0), 2);
  result.set_lease(lease.lease());
  worker.say(result);
  ASSERT_TRUE(worker.readsUntil(v1::ToWorker::kLanded));
  EXPECT_EQ(tests::query(folder / "store", "SELECT count(*) FROM points_sweep"),
            (std::vector<tests::Row>{{std::to_string(lease.jobs(0).points())}}));
}

TEST_F(WorkTest, ResultUnderAForeignLeaseIsIgnored) {
  begin(1);
  HandWorker worker(channel());
  worker.say(HandWorker::hello());
  const v1::Lease lease = worker.lease();
  v1::JobResult result = tests::standInResult(lease.jobs(0), 2);
  result.set_lease(lease.lease() + 1000);
  worker.say(result);
  result.set_lease(lease.lease());
  worker.say(result);
  worker.say(result);  // and twice is once
  ASSERT_TRUE(worker.readsUntil(v1::ToWorker::kLanded));
  worker.vanish();
  const ThreadWorker other(channel(), standIn());
  finished();
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, WrongResultsAreErrorsOfTheirJobAndNeverReachTheStore) {
  // Three jobs; each of these is returned for job 0 until it has failed.
  const std::vector<std::pair<std::string, std::function<void(v1::JobResult&)>>> wrong{
      {"points", [](v1::JobResult& result) { result.set_points(result.points() + 1); }},
      {"column", [](v1::JobResult& result) { result.mutable_columns(1)->mutable_values()->pop_back(); }},
      {"", [](v1::JobResult& result) { (*result.mutable_outcome())[3] = '\x63'; }},
  };
  begin(3);
  HandWorker worker(channel());
  worker.say(HandWorker::hello());
  std::size_t said = 0;
  while (said < wrong.size()) {
    const v1::Lease lease = worker.lease();
    ASSERT_GT(lease.jobs_size(), 0);
    for (const v1::LeasedJob& job : lease.jobs()) {
      v1::JobResult result = tests::standInResult(job, 2);
      result.set_lease(lease.lease());
      if (job.job() == 0) wrong[said++].second(result);
      worker.say(result);
    }
  }
  EXPECT_EQ(finished().jobs_failed(), 1);
  end();
  const auto failed = tests::query(folder / "store", "SELECT id, failure FROM job WHERE state = 'failed'");
  ASSERT_EQ(failed.size(), 1);
  EXPECT_EQ(failed[0][0], "0");
  EXPECT_THAT(failed[0][1], HasSubstr("result refused"));
  EXPECT_EQ(tests::query(folder / "store", "SELECT count(*) FROM points_sweep"),
            (std::vector<tests::Row>{{std::to_string(300 - 128)}}));
}

TEST_F(WorkTest, JobThatReturnsErrorsFailsWithItsReasonAndTheRestGoesOn) {
  begin();
  const ThreadWorker worker(channel(), standIn([](const v1::LeasedJob& job, const auto&) -> Status {
                              if (job.job() == 7) return Error{"no such state"};
                              return success();
                            }));
  EXPECT_EQ(finished().jobs_failed(), 1);
  end();
  EXPECT_EQ(
      tests::query(folder / "store", "SELECT id, attempts, failure FROM job WHERE state <> 'committed'"),
      (std::vector<tests::Row>{{"7", "3", "no such state"}}));
}

TEST_F(WorkTest, VanishedWorkersJobsGoToAnother) {
  begin();
  HandWorker gone(channel());
  gone.say(HandWorker::hello());
  EXPECT_GT(gone.lease().jobs_size(), 0);
  gone.vanish();
  const ThreadWorker worker(channel(), standIn());
  finished();
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, SilentWorkersLeaseExpiresAndItsLateResultIsRefused) {
  QueuePolicy policy;
  policy.lease = 300ms;
  begin(3, policy);
  HandWorker silent(channel());
  silent.say(HandWorker::hello());
  const v1::Lease lease = silent.lease();
  {
    const ThreadWorker worker(channel(), standIn());
    finished();
  }
  v1::JobResult late = tests::standInResult(lease.jobs(0), 2);
  late.set_lease(lease.lease());
  silent.say(late);
  EXPECT_EQ(silent.end().error_code(), grpc::StatusCode::ABORTED);
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, LeavingWorkerFinishesOrGivesBack) {
  begin();
  std::atomic<int> begun{0};
  {
    ThreadWorker leaving(channel(), standIn([&](const auto&, const auto&) {
                           ++begun;
                           std::this_thread::sleep_for(20ms);
                           return success();
                         }));
    while (begun < 3) std::this_thread::sleep_for(1ms);
    leaving.stop();
    EXPECT_TRUE(leaving.status.ok());
  }
  const ThreadWorker worker(channel(), standIn());
  finished();
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, CancelledStudyStopsItsWorkersAndKeepsWhatIsDone) {
  begin(200);
  const ThreadWorker worker(channel(), standIn([](const auto&, const auto& stop) {
                              for (int i = 0; i < 10 && !stop; ++i) std::this_thread::sleep_for(1ms);
                              return success();
                            }));
  while (coordinator->progress("sweep")->points_done() == 0) std::this_thread::sleep_for(1ms);
  v1::CancelReply reply;
  EXPECT_TRUE(coordinator->cancel("sweep", reply).ok());
  EXPECT_EQ(reply.state(), "cancelled");
  const std::uint64_t done = coordinator->progress("sweep")->points_done();
  EXPECT_LT(done, plan.points());
  end();
  EXPECT_EQ(tests::query(folder / "store", "SELECT count(*) FROM points_sweep"),
            (std::vector<tests::Row>{{std::to_string(done)}}));
}

TEST_F(WorkTest, CoordinatorStartedAgainGoesOnAndWorkersComeBack) {
  begin(200);
  const ThreadWorker worker(channel(), standIn([](const auto&, const auto&) {
                              std::this_thread::sleep_for(10ms);
                              return success();
                            }));
  for (int again = 0; again < 3; ++again) {
    const std::uint64_t before = coordinator->progress("sweep")->points_done();
    while (coordinator->progress("sweep")->points_done() == before)
      ASSERT_EQ(coordinator->await("sweep", 1ms)->state(), "running") << "too quick for this test";
    end();
    start();
  }
  finished();
  end();
  EXPECT_EQ(faultsOf(folder / "store", plan), "");
}

TEST_F(WorkTest, FollowEndsWithTheFinalState) {
  begin();
  auto stub = v1::Studies::NewStub(channel());
  grpc::ClientContext context;
  v1::FollowRequest request;
  request.set_name("sweep");
  const auto stream = stub->Follow(&context, request);
  const ThreadWorker worker(channel(), standIn());
  v1::Progress progress;
  while (stream->Read(&progress)) {
  }
  EXPECT_TRUE(stream->Finish().ok());
  EXPECT_EQ(progress.state(), "complete");
  EXPECT_EQ(progress.points_done(), plan.points());
  EXPECT_EQ(progress.outcomes(0), plan.points());
}

TEST_F(WorkTest, UnknownStudyIsNotFound) {
  begin(1);
  auto stub = v1::Studies::NewStub(channel());
  grpc::ClientContext context;
  v1::CancelRequest request;
  request.set_name("nothing");
  v1::CancelReply reply;
  EXPECT_EQ(stub->Cancel(&context, request, &reply).error_code(), grpc::StatusCode::NOT_FOUND);
}

TEST(ListenTest, OnlyLoopbackUnlessAllowed) {
  for (const char* address : {"127.0.0.1:4747", "localhost:0", "[::1]:80", "unix:/run/holdfast"})
    EXPECT_TRUE(checkListen(address, Exposure::loopback_only).ok()) << address;
  for (const char* address :
       {"0.0.0.0:4747", "192.168.1.5:4747", "example.org:1", "127.evil.org:1", "[::]:1"}) {
    const Status status = checkListen(address, Exposure::loopback_only);
    ASSERT_FALSE(status.ok()) << address;
    EXPECT_THAT(status.error().message, HasSubstr("--insecure"));
    EXPECT_TRUE(checkListen(address, Exposure::insecure_allowed).ok()) << address;
  }
  EXPECT_FALSE(checkListen("4747", Exposure::insecure_allowed).ok());
}

}  // namespace
}  // namespace holdfast::coordinator
