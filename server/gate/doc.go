// Package gate decides who may say and hear what: pairing by one-time codes,
// devices with their tokens, and roles.
//
// Nouns:
//
//   - [Role]: watch sees, crew marks and reports, skipper decides and pairs.
//   - [Device]: a phone or script that was paired, known by its token.
//   - [Gate]: all devices and the codes that are open now.
//   - [Hosts]: under which names the server may be asked for.
//
// A token is 256 bits of chance; only its SHA-256 is kept, so that a stolen
// disk holds nothing that opens a door. A plain hash is enough: a slow one
// protects guessable secrets, and this is none.
//
// A paired device stays paired until it is revoked. A crew that is locked out
// when someone is in the water is the greater hazard, so there is no expiry.
//
// Pairing may be open (on the machine itself, for a trial): then whoever asks
// is a skipper.
//
// The package makes no connections and no certificates.
package gate
