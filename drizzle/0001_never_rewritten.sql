CREATE TRIGGER `events_refuse_update` BEFORE UPDATE ON `events`
BEGIN
  SELECT RAISE(ABORT, 'events are append-only');
END;
--> statement-breakpoint
CREATE TRIGGER `events_refuse_delete` BEFORE DELETE ON `events`
BEGIN
  SELECT RAISE(ABORT, 'events are append-only');
END;
--> statement-breakpoint
CREATE TRIGGER `protocols_refuse_update` BEFORE UPDATE ON `protocols`
BEGIN
  SELECT RAISE(ABORT, 'a protocol version never changes');
END;
--> statement-breakpoint
CREATE TRIGGER `fits_refuse_rewrite` BEFORE UPDATE OF `recording_id`, `protocol_id`, `number`, `protocol_document`, `protocol_sha256`, `result`, `engine`, `saved_by`, `saved_at` ON `fits`
BEGIN
  SELECT RAISE(ABORT, 'a saved fit is superseded, never overwritten');
END;
