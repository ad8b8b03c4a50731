package store

import (
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"time"

	"wakeback/drift/nav"
)

// A block holds fixes of one device: CRC-32C of the rest (4 bytes), then for
// each fix varints of the differences to the one before: time in ms, latitude
// and longitude in 1e-7 degree, and of the values speed in 0.01 kn, course in
// 0.1 degree and error in 0.1 m, each plus one, 0 being absent. Steady
// steaming at 1 Hz comes to about 11 bytes a fix: 40 kB an hour.
const (
	blockFixes = 600
	// blockSpan bounds a block in time, so that the blocks which reach into a
	// stretch of time are found by their beginnings.
	blockSpan = time.Hour
)

// errTrack is wrapped when a block does not check.
var errTrack = errors.New("a stretch of track is damaged")

// recordable leaves out fixes that are nowhere on earth; one of them must not
// cost the others their block.
func recordable(fixes []nav.Fix) []nav.Fix {
	out := make([]nav.Fix, 0, len(fixes))
	for _, f := range fixes {
		lat, lon := f.Position.LatDeg(), f.Position.LonDeg()
		if math.Abs(lat) <= 90 && math.Abs(lon) <= 180 { // false for NaN
			f.At = f.At.UTC().Truncate(time.Millisecond)
			out = append(out, f)
		}
	}
	return nav.NewTrack(out).Fixes()
}

// encodeFixes makes a block of fixes in order of time.
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

// appendOpt writes a value; one that no instrument gives counts as absent.
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
	r := varints{rest: block[4:]}
	fixes := make([]nav.Fix, 0, len(block)/8)
	var t, lat, lon int64
	for len(r.rest) > 0 {
		t, lat, lon = t+r.signed(), lat+r.signed(), lon+r.signed()
		sog, cog, errorM := r.opt(100), r.opt(10), r.opt(10)
		if r.bad || lat < -90e7 || lat > 90e7 || lon < -180e7 || lon > 180e7 {
			return nil, errTrack
		}
		f := nav.Fix{
			At:       time.UnixMilli(t).UTC(),
			Position: nav.PositionFromDegrees(float64(lat)/1e7, float64(lon)/1e7),
			SogKn:    sog, ErrorM: errorM,
		}
		if c, ok := cog.Get(); ok {
			f.CogTrue = nav.Some(nav.True(c))
		}
		fixes = append(fixes, f)
	}
	return fixes, nil
}

// varints reads numbers one after the other; bad stays once one is not there.
type varints struct {
	rest []byte
	bad  bool
}

func (r *varints) signed() int64 {
	v, n := binary.Varint(r.rest)
	r.step(n)
	return v
}

func (r *varints) opt(perUnit float64) nav.Opt[float64] {
	v, n := binary.Uvarint(r.rest)
	r.step(n)
	if v == 0 {
		return nav.None[float64]()
	}
	return nav.Some(float64(v-1) / perUnit)
}

func (r *varints) step(n int) {
	if n <= 0 {
		r.bad, r.rest = true, nil
		return
	}
	r.rest = r.rest[n:]
}

// trackChange is fixes of one device as the journal has them: length of the
// device's name (1 byte), name, block.
func trackFrame(device string, fixes []nav.Fix) (frame, error) {
	if device == "" || len(device) > 255 {
		return frame{}, fmt.Errorf("the track of %q: a device's name has 1 to 255 bytes", device)
	}
	payload := append([]byte{byte(len(device))}, device...)
	return frame{kind: frameTrack, payload: append(payload, encodeFixes(fixes)...)}, nil
}

func readTrackFrame(payload []byte) (device string, fixes []nav.Fix, err error) {
	if len(payload) == 0 || len(payload) < 1+int(payload[0]) {
		return "", nil, errTrack
	}
	n := 1 + int(payload[0])
	fixes, err = decodeFixes(payload[n:])
	return string(payload[1:n]), fixes, err
}
