// Events of jobs, and text for monitoring.
#include <gtest/gtest.h>

#include <thread>

#include "service/event_feed.hpp"
#include "service/metrics.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using std::chrono::milliseconds;

TEST(Events, ComeInOrderFromWhereOneStands) {
  EventFeed feed(4);
  EXPECT_TRUE(feed.after(0, milliseconds(0)).empty());
  for (int k = 1; k <= 4; ++k) feed.publish("job", "j", std::to_string(k));
  const auto news = feed.after(2, milliseconds(0));
  ASSERT_EQ(news.size(), 2U);
  EXPECT_EQ(to_event_stream(news[0]), "id: 3\nevent: job\ndata: 3\n\n");
  EXPECT_EQ(feed.after(0, milliseconds(0), 3).size(), 3U);
}

TEST(Events, WhoeverFellBehindReadsAgain) {
  EventFeed feed(4);
  for (int k = 1; k <= 9; ++k) feed.publish("job", "j", "x");
  auto news = feed.after(2, milliseconds(0));
  ASSERT_EQ(news.size(), 1U);
  EXPECT_EQ(news[0].kind, "resync");
  EXPECT_EQ(news[0].number, 9U);
  EXPECT_EQ(feed.after(77, milliseconds(0)).at(0).kind, "resync");  // of a service that ended
}

TEST(Events, ClosingWakesThoseWhoWait) {
  EventFeed feed;
  std::thread waits([&] { EXPECT_TRUE(feed.after(0, std::chrono::hours(1)).empty()); });
  feed.close();
  waits.join();
  EXPECT_TRUE(feed.closed());
}

TEST(Metrics, LabelsAreEscaped) {
  EXPECT_EQ(labels_to_text({{"a", "x\"\\\n"}, {"b", ""}}), "{a=\"x\\\"\\\\\\n\",b=\"\"}");
  EXPECT_EQ(labels_to_text({}), "");
}

TEST(Problems, AreTextWhateverIsInThem) {
  const HttpResponse response = problem_response(422, "code", "bad \xff bytes", "mend", "here");
  EXPECT_EQ(response.status, 422);
  EXPECT_EQ(response.content_type, "application/problem+json");
  EXPECT_NE(response.body.find("\"remedy\":\"mend\""), std::string::npos);
  EXPECT_EQ(printable("a\xff"), "a\xef\xbf\xbd");
}

}  // namespace
}  // namespace stanchion::service
