export { type FakeHttp, type FakeHttpInit, startFakeHttp } from './http'
export { type Kept, type KeptCall, type KeptMail, type KeptSms, nothingKept } from './kept'
export { type FakeSmtp, SMTP_ANSWER, startFakeSmtp } from './smtp'
