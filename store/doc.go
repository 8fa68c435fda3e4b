// Package store keeps the history of a plant in one bbolt file: the readings
// as they came, one record a minute and one an hour of each load, the energy
// registers, what happened beside that, the site files that all this was worked by, and
// the engine's own state. Everything that belongs together is committed in one transaction,
// so that a process killed at any moment finds on its return either all of a batch or
// nothing of it.
//
// # Layout, version 3
//
// The file holds these buckets. Integers in keys are big-endian, so that keys
// sort as numbers do; a signed time has its sign bit flipped for the same
// reason. Integers and float64 in values are little-endian. uvarint is the
// base-128 form of encoding/binary, and zigzag maps 0, -1, 1, -2 to 0, 1, 2, 3. Every
// checksum, written CRC, is a uint32: CRC-32C over the key followed by the bytes
// of the value before the checksum. The keys "all" and "checkpoint" are there from the
// beginning.
//
//	meta       "version"  uint32: 3
//	           "created"  int64: Unix nanoseconds at creation
//	           "hours"    int64 built, int64 trimmed; CRC
//	names      "all" -> for each name: uint32 id, uvarint length and bytes of its
//	           kind, the same of the name; CRC
//	journal    a bucket for each closed group, by its name; in it "r" -> records
//	recent     a bucket for each part of the open group, by the uint64 sequence
//	           of its first record; in it "r" -> records
//	sealed     a bucket for each block, by its name; in it "r" -> the block
//	tail0..2   "r" -> the last records of the open group, cut in pieces
//	minutes    int64 start, uint32 load / 8 -> minute records, CRC; in 00 a bucket for
//	           each block of minutes, by int64 span, uint32 load / 8; in it "r" -> the block
//	hours      int64 start, uint32 load / 8 -> hour records, CRC
//	events     int64 at, uint64 number -> int64 until (0: it lasts), then for kind, subject
//	           and text: uvarint length, bytes; CRC
//	registers  "all" -> for each load, by number: uint32 load and 8 float64 (given,
//	           taken, measured, missing, bridged, bridged given and taken, uncertain
//	           time); 1 byte: 8; CRC
//	state      "checkpoint" -> 0 or 1 (is there one), uint64 sequence of the last
//	           record it stands for, the engine's bytes, CRC
//	           "sites", a bucket, once there is a site file: int64 from -> its SHA-256,
//	           which it is in force from then on, CRC; SHA-256 -> the text by RFC 1951, CRC
//
// names, minutes, hours, events, state and sites also hold a bucket named 00, but for that of
// minutes an empty one: a bucket that holds another is never laid into the root's page, whose
// room the tails need.
//
// The sequence of the bucket events is the greatest number that an event has borne.
//
// Each batch that has beats makes one record, and records are numbered from 1
// without a gap. A record is
//
//	uvarint length of the body, body, CRC
//
// where the checksum's key is the record's sequence number. The body is
//
//	uvarint beats, then for each beat:
//	    instant through, uvarint readings, then for each reading:
//	        1 byte of control, [uvarint tag], [instant], value bytes
//
// A reading is told by what it does not share with the reading foreseen. The
// control byte says which parts follow:
//
//	bit 7      the tag is not the foreseen one; uvarint tag follows
//	bit 6      the time is not the foreseen one; an instant follows
//	bit 5      Stamped is not as in the reading before
//	bits 0-4   which bytes of value XOR (the tag's value before) follow:
//	           0 none, 1 all eight, else those left when whole zero bytes are
//	           taken off both ends: 2 + index in the list of (leading, count)
//	           (1,1) (1,2) .. (1,7) (2,1) .. (2,6) (3,1) .. (7,1);
//	           31 the mark is not that of the tag's reading before: before the value
//	           bytes stand 1 byte of mark and 1 byte, which says what is said here
//
// The value bytes follow with the low one first. An instant is the difference
// d = time - foreseen time in nanoseconds, as q = floor(d / 10^6) and r = d - q·10^6:
// uvarint 2·zigzag(q) + (1 if r is not 0), then uvarint r if it is not 0.
//
// Foreseen are: for the tag, the one that followed the tag before when that
// last occurred, or else the next number; for its time, its last time plus its
// last step, or for a tag that is new in the group, the time of the reading
// before; for Stamped before the first reading, false; for its value and its mark, its
// last ones or 0; for through, as for a time, with 0 before the first beat.
//
// Records that share this memory form a group. The memory starts empty with
// each group. The open group lies in recent and, after that, in the three tails
// taken as one run of bytes; once it holds 48 KiB it is closed and becomes one
// bucket of journal under this name:
//
//	uint64 first sequence, big-endian; uint64 last sequence, int64 earliest,
//	int64 latest, uint32 readings, CRC of these
//
// Earliest and latest bound the times of all beats and readings in the group,
// and readings is how many there are. The names are the only index by time:
// a search looks at all of them, some fifty to a page.
//
// Groups that the checkpoint stands for, and whose last beat is older than
// Options.BeatAge, are put together in a block, which forgets the beats and keeps the
// readings of each tag in the order in which they came. A block bears a name as a
// group does, for all its groups, and takes their place in one transaction. A group
// that cannot be read stays. A block is
//
//	uvarint columns, then for each: uvarint tag less the tag before, uvarint
//	    readings, uvarint bytes of the column; CRC of all this
//	columns, each with a CRC
//
// where the checksum's key is the name without its own CRC, and for a column the uint32
// tag after that. A column of readings begins with
//
//	1 byte tick, and 128 where any reading has a mark that is not 0, 1 byte
//	16·form + digits, instant start less the name's earliest,
//	uvarint zigzag(base), uvarint step
//
// All times are start + a whole number of 10^tick ns. All values are told as whole
// numbers n = base + step·m. By form 0, n is a float's bits, flipped so that numbers
// sort as floats do; otherwise x = n/10^digits, and the value is x by form 1, x +
// 273.15 by 2, x/3600 by 3, and x·(1/3600) by 4. The value may lie beside that by a few
// floats, or by any number of them where it is no such decimal.
//
// An arithmetic coder of binary decisions follows, whose trailing zero bytes are
// left out: of each reading one decision whether only the value is to be told; if not,
// how much the difference of two times differs from the one before, by how many floats
// the value lies beside its number's, whether Stamped changes, and in a column with marks
// whether the mark does and to what, the highest bit first; then, of a reading whose mark
// is not 0, whether its value is NaN, as bits 0x7ff8000000000001; if not, m less the m
// before. [numbers] tells how an integer is cut into decisions, [bit] how each is
// forecast.
//
// Under one key of minutes lie those of up to 8 loads with one start, sorted by
// load, and end with a CRC. Each is
//
//	1 byte shape: bits 0-2 the remainder of load / 8, bit 3 set, bit 4 if rare floats
//	    follow, bit 5 if parts do, bit 6 if Uncertain does, bit 7 if Expected does
//	floats Measured, Missing, Given, Taken
//	floats Duty, DutyMin, DutyMax, DutyUncertainty, Flow, Inlet, Outlet, Pressure
//	[floats Bridged, BridgedGiven, BridgedTaken, Latent, Witness, Compared, Content]
//	[uvarint which parts there are: bit 0 the root of Random, bit 1 + i Systematic[i];
//	    uint16 for each of these]
//	[float Uncertain]
//	[floats Expected, ExpectedError]
//
// Of a run of floats first come their counts, of 4 bits each, low half of a byte first,
// and then their bytes. Of each float, XOR its forerunner, those bytes are told that are
// left without zero bytes at the low end, high one first; a count up to 8 says how
// many, and a greater one how many and 8, of those after a high byte that is zero. The
// forerunner is 0, but Duty for DutyMin and DutyMax, Inlet for Outlet, Measured for Uncertain, and for Duty
// |Given - Taken| / Measured if this is a number. The second run, Content and the last run are float32,
// the others float64.
//
// The uint16 of a part is its sign, 6 bits e and 9 bits m: (1 + m/512)·2^(e-16), but
// infinite with the greatest e and m.
//
// A minute of the first layout has bits 3 to 7 of shape clear; there follows one run of
// the 12 floats of the first two, all float64 and with no forerunner for Duty. Such
// a minute stays as it is until one of the same key is replaced.
//
// Minutes are sealed once their hours are built and they are three hours old: those under
// all keys of one uint32 that lie in one span, of six hours of UTC, become a block. Each block
// is written in a transaction; the keys go in some that follow the last of the span. A key that
// is there stands before what a block has for that start, so that nothing is there twice. Late
// minutes of a sealed span come under a key again, with all that the block has for it, until the
// block is made anew. A key that cannot be read stays, and where a block cannot, so do all
// keys beside it.
//
// A block of minutes is made as one of readings is, with loads in the place of tags and its
// own key as that of the checksums. A column begins with
//
//	1 byte tick, instant start less that of the span
//
// and goes on in the same arithmetic code: of each minute by how much the difference of two
// times differs from the one before; then 8 bits, how many floats of a minute are told, those
// after which are 0, and of each in the order of [figures] 2 bits: 0 for all are 0, 1 for all are the float64 whose bits
// follow, and 2 for 1 bit full, 1 bit before, 2 bits like, and a number for each minute. Most
// floats are told by the bits of the float32, or the part, that a minute keeps of them; with
// full, or if they are told in full anyway, by those of the float64. These are made numbers of
// the same order. Told is a number less that of what it is like, which is another float of the
// same minute (0: nothing), and with before, less that difference in the minute before. Which
// is shortest, the writer finds out for each column.
//
// Hours lie in the same way. Each is
//
//	1 byte shape, as of a minute but with bit 3 clear; uvarint minutes
//	floats Measured, Bridged, Missing, Latent, Given, Taken, Mass, HeatUncertainty
//	floats Duty, DutyMin, DutyMax, Demand, Inlet, Outlet, Pressure, Content
//	[floats BridgedGiven, BridgedTaken, Witness, Compared, Untold]
//	[uvarint which parts there are: bit 0 Random, bit 1 + i Systematic[i]; floats of
//	    these]
//	[float Uncertain]
//	[floats Expected, ExpectedError]
//
// with the same forerunners, Duty for Demand as well, and HeatUncertainty for Untold; the
// second and the last run are float32. Hours that begin before built are
// there; later ones are told from their minutes. A commit that brings minutes of a
// later hour builds those before it, and one that brings minutes of a built hour
// builds it anew from all of its minutes, so that none counts twice. Of hours
// before trimmed minutes may be gone: such an hour stays as it was built.
//
// # Why in this shape
//
// bbolt writes whole pages, and a path of them from leaf to root. A small bucket
// lies inside the root's own page, and so a commit that only adds to the tails
// writes two pages: root and meta. Once the root's page is full, the tails move
// to recent, and from there in larger pieces to journal, where a group costs one
// key. Keys only ever grow, so pages fill up and stay as they are. Groups have
// buckets of their own because bbolt keeps two keys and more in each page, and so
// writes long values again with each of the next few.
//
// Means are float32, which is far finer than anything that is measured, and of which the
// decimals that people write can be told again to the digit; the bytes below are noise that
// no coding shortens. A minute of a water
// circuit takes 42 bytes so, and 58 with the parts of its uncertainty, where it took 81
// in full without them. Heat and times are told in full, for they are added up. In the pages
// it takes 69 bytes with those of its key, and 31 once it is sealed, of which 7 are the noise of
// its heat. What is expected by a fixed design adds 6 bytes to a minute, and 17 to a column of six
// hours; by one that moves each minute, 9 and about 5 bytes a minute.
//
// Blocks of minutes lie within the bucket of the minutes because one more bucket in the root's
// page would take room from the tails. Six hours are long enough for a column to learn what it
// is like: of an hour's minutes each takes 2 bytes more, of a day's half a byte less. Keys go in
// order of time, whatever their loads, so that whole pages become free; to remove those of one
// block at a time would write each page again for every eight loads.
//
// There are no records of days. A day is one of the site's clock, of 23 to 25 hours and
// beginning at any quarter of a UTC hour, which the history does not know; and a year of a
// load by the day, added up from its 8,760 hours, takes less than 30 ms on a desk machine.
//
// The file does not grow beyond its bound, for pages that Trim frees are used again: filled
// for ten weeks at MaxBytes, it grows to 1.14 of that. It shrinks only at
// Open, when more than half of it is free. A copy made while commits go on would have to be
// brought up to each of them, and would need the room of both files and wear the flash
// by a whole file, for room that the bound has set aside for the history anyway.
//
// The list of free pages is in the file only from a Close to the first commit after
// it, which spares the others a page. Where it is not, Open makes it from a walk over all
// pages, after the one that looks for damage; where it is, it is looked at as well.
//
// Open brings a file of version 1, which has neither hours, events nor sealed, and 4 float64 in each
// register, to version 3: it moves the
// tails to recent, which makes room in the root's page, and adds what is missing,
// with built and trimmed at the least int64. A file of version 2, which has no blocks of
// minutes, needs nothing but the new number, by which programs that know no such blocks refuse
// it. The commits that follow build the hours
// and seal groups and minutes, a few each. Other versions are refused. Change any of the above, and the version must
// change with it.
//
// # What is damaged
//
// Each record has a checksum, and bbolt's pages are looked at by Open, which refuses a file
// of which any is damaged. A record that turns out damaged later is told to its readers; a
// commit that is to replace it does so, builds hours anew where their minutes are there, and
// counts it, see [Store.Damaged]. What is left of a file that Open refuses is saved by
// [Salvage]. Where that has lost the names, one of kind "lost" has the greatest number that
// was met, so that none is given again.
package store
