// Speech: an extra that can fail without a word. Nothing is said by voice alone.

/** Between two orders: our choice, so that one is understood before the next. */
const APART_MS = 4_000;

let last = { text: "", ms: Number.NEGATIVE_INFINITY };

/** Says an order, unless it was just said or another is still fresh. */
export function say(text: string, lang = "en"): void {
  if (!("speechSynthesis" in window)) return;
  const now = performance.now();
  if (text === last.text || now - last.ms < APART_MS) return;
  last = { text, ms: now };
  const voices = speechSynthesis.getVoices();
  // A voice that needs the internet would stay silent at sea.
  const local = voices.find((v) => v.localService && v.lang.startsWith(lang));
  if (!local) return;
  const speech = new SpeechSynthesisUtterance(text);
  speech.voice = local;
  speechSynthesis.speak(speech);
}
