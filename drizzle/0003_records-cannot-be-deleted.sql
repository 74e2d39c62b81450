CREATE TRIGGER `record_no_delete` BEFORE DELETE ON `record` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The record is append-only';
