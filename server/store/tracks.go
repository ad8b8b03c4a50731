package store

import (
	"bytes"
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// A block holds up to blockFixes fixes of one device: CRC-32C of the rest (4
// bytes), then for each fix varints of the differences to the one before:
// time in ms, latitude and longitude in 1e-7 degree, and of the values speed
// in 0.01 kn, course in 0.1 degree and error in 0.1 m, each plus one, 0 being
// absent. Steady steaming at 1 Hz comes to about 11 bytes a fix: 40 kB an hour.
const blockFixes = 600

// errTrack is wrapped when a block does not check.
var errTrack = errors.New("a stretch of track is damaged")

func encodeFixes(fixes []nav.Fix) []byte {
	out := make([]byte, 4, 4+12*len(fixes))
	var t, lat, lon int64
	for _, f := range fixes {
		ft := f.At.UnixMilli()
		flat, flon := int64(math.Round(f.Position.LatDeg()*1e7)), int64(math.Round(f.Position.LonDeg()*1e7))
		out = binary.AppendVarint(out, ft-t)
		out = binary.AppendVarint(out, flat-lat)
		out = binary.AppendVarint(out, flon-lon)
		out = appendOpt(out, f.SogKn, 100)
		cog := nav.None[float64]()
		if c, ok := f.CogTrue.Get(); ok {
			cog = nav.Some(float64(c))
		}
		out = appendOpt(out, cog, 10)
		out = appendOpt(out, f.ErrorM, 10)
		t, lat, lon = ft, flat, flon
	}
	binary.BigEndian.PutUint32(out, crc32.Checksum(out[4:], crcTable))
	return out
}

func appendOpt(dst []byte, v nav.Opt[float64], perUnit float64) []byte {
	x, ok := v.Get()
	if !ok || !(x >= 0 && x < 1e9) {
		return binary.AppendUvarint(dst, 0)
	}
	return binary.AppendUvarint(dst, uint64(math.Round(x*perUnit))+1)
}

func decodeFixes(block []byte) ([]nav.Fix, error) {
	if len(block) < 4 || binary.BigEndian.Uint32(block) != crc32.Checksum(block[4:], crcTable) {
		return nil, errTrack
	}
	r := bytes.NewReader(block[4:])
	var fixes []nav.Fix
	var t, lat, lon int64
	for r.Len() > 0 {
		var d [3]int64
		var o [3]uint64
		var err error
		for i := range d {
			if d[i], err = binary.ReadVarint(r); err != nil {
				return nil, fmt.Errorf("%w: %w", errTrack, err)
			}
		}
		for i := range o {
			if o[i], err = binary.ReadUvarint(r); err != nil {
				return nil, fmt.Errorf("%w: %w", errTrack, err)
			}
		}
		t, lat, lon = t+d[0], lat+d[1], lon+d[2]
		f := nav.Fix{
			At:       time.UnixMilli(t).UTC(),
			Position: nav.PositionFromDegrees(float64(lat)/1e7, float64(lon)/1e7),
			SogKn:    opt(o[0], 100), ErrorM: opt(o[2], 10),
		}
		if c, ok := opt(o[1], 10).Get(); ok {
			f.CogTrue = nav.Some(nav.True(c))
		}
		fixes = append(fixes, f)
	}
	return fixes, nil
}

func opt(v uint64, perUnit float64) nav.Opt[float64] {
	if v == 0 {
		return nav.None[float64]()
	}
	return nav.Some(float64(v-1) / perUnit)
}

func trackKey(device incident.DeviceID, at time.Time) []byte {
	return binary.BigEndian.AppendUint64([]byte(string(device)+"\x00"), uint64(at.UnixMilli()))
}

// putTrack adds fixes, in order of time, to the device's newest block while
// there is room in it and they are later, else in a new one.
func putTrack(tx *bbolt.Tx, device incident.DeviceID, fixes []nav.Fix) error {
	b := tx.Bucket(bucketTracks)
	for len(fixes) > 0 {
		key := trackKey(device, fixes[0].At)
		block := fixes[:min(len(fixes), blockFixes)]
		rest := fixes[len(block):]
		if last, old := lastBlock(b, device); last != nil && len(old) < blockFixes && !fixes[0].At.Before(old[len(old)-1].At) {
			n := min(len(fixes), blockFixes-len(old))
			key, block, rest = last, append(old, fixes[:n]...), fixes[n:]
		} else if taken := b.Get(key); taken != nil {
			// A block that begins at the same moment: fixes that came late.
			old, err := decodeFixes(taken)
			if err != nil {
				return err
			}
			block = nav.NewTrack(append(old, block...)).Fixes()
		}
		if err := b.Put(key, encodeFixes(block)); err != nil {
			return fmt.Errorf("write the track of %s: %w", device, err)
		}
		fixes = rest
	}
	return nil
}

// lastBlock is the device's newest block; nil when there is none or it does
// not check.
func lastBlock(b *bbolt.Bucket, device incident.DeviceID) (key []byte, fixes []nav.Fix) {
	c := b.Cursor()
	prefix := []byte(string(device) + "\x00")
	var v []byte
	if k, _ := c.Seek([]byte(string(device) + "\x01")); k == nil {
		key, v = c.Last()
	} else {
		key, v = c.Prev()
	}
	if key == nil || !bytes.HasPrefix(key, prefix) {
		return nil, nil
	}
	fixes, err := decodeFixes(v)
	if err != nil || len(fixes) == 0 {
		return nil, nil
	}
	return append([]byte(nil), key...), fixes
}

func readTracks(tx *bbolt.Tx) error {
	return tx.Bucket(bucketTracks).ForEach(func(_, v []byte) error {
		_, err := decodeFixes(v)
		return err
	})
}

// trackChange is fixes of one device as the journal has them.
type trackChange struct {
	Device incident.DeviceID `json:"device"`
	Block  []byte            `json:"block"`
}

func (t trackChange) fixes() []nav.Fix {
	fixes, err := decodeFixes(t.Block)
	if err != nil {
		return nil // the frame checked, so this cannot be; a track is not worth a start
	}
	return fixes
}

// AppendTrack keeps fixes of a device, in order of time. It is durable with
// the next commit of anything, or at the latest with the next of its own.
func (s *Store) AppendTrack(device incident.DeviceID, fixes []nav.Fix) error {
	if len(fixes) == 0 {
		return nil
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	payload, err := json.Marshal(trackChange{Device: device, Block: encodeFixes(fixes)})
	if err != nil {
		return fmt.Errorf("write the track of %s: %w", device, err)
	}
	return s.commit(frame{kind: frameTrack, payload: payload}, func(tx *bbolt.Tx) error { return putTrack(tx, device, fixes) })
}

// Track returns the fixes of a device from one moment to another, both
// included, in order of time. A block that does not check is left out and
// the error says so.
func (s *Store) Track(device incident.DeviceID, from, to time.Time) ([]nav.Fix, error) {
	var fixes []nav.Fix
	var damaged error
	err := s.view(func(tx *bbolt.Tx) error {
		c := tx.Bucket(bucketTracks).Cursor()
		prefix := []byte(string(device) + "\x00")
		k, v := c.Seek(trackKey(device, from))
		if k == nil || !bytes.HasPrefix(k, prefix) || bytes.Compare(k, trackKey(device, from)) > 0 {
			// The block before may reach into the time asked for.
			if k == nil {
				k, v = c.Last()
			} else {
				k, v = c.Prev()
			}
			if k == nil || !bytes.HasPrefix(k, prefix) {
				k, v = c.Seek(prefix)
			}
		}
		for ; k != nil && bytes.HasPrefix(k, prefix) && bytes.Compare(k, trackKey(device, to)) <= 0; k, v = c.Next() {
			block, err := decodeFixes(v)
			if err != nil {
				damaged = err
				continue
			}
			for _, f := range block {
				if !f.At.Before(from) && !f.At.After(to) {
					fixes = append(fixes, f)
				}
			}
		}
		return nil
	})
	if err != nil {
		return nil, fmt.Errorf("read the track of %s: %w", device, err)
	}
	return nav.NewTrack(fixes).Fixes(), damaged
}

// TrackDevices are the devices that have a track.
func (s *Store) TrackDevices() ([]incident.DeviceID, error) {
	var out []incident.DeviceID
	err := s.view(func(tx *bbolt.Tx) error {
		c := tx.Bucket(bucketTracks).Cursor()
		for k, _ := c.First(); k != nil; {
			device, _ := splitKey(k)
			out = append(out, incident.DeviceID(device))
			k, _ = c.Seek([]byte(device + "\x01"))
		}
		return nil
	})
	return out, err
}
