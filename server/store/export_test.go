package store

import "time"

// QueryNowNext is a query for tests that look at how it is carried out.
const QueryNowNext = qNowNext

// SetFeedSilence shortens the silence after which a listener asks whether its
// connection stands.
func (s *Store) SetFeedSilence(d time.Duration) { s.feedSilence = d }

// LockMigrate is the lock that migrating copies of the program take.
const LockMigrate = lockMigrate
