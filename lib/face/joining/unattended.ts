import { heredoc, SERVICE } from './service'
import { AGENT_PORT, type Command, codeOf, FILE_NAME, type JoiningInput, wrapped } from './types'

const FOLDER = '/etc/thinspan'

/** The code as a credential: neither in the environment nor in a file that the agent's user could read. */
const CODE_DROP_IN = `[Service]
LoadCredential=code:${FOLDER}/code
Environment=THINSPAN_CODE_FILE=%d/code
`

/** What a configuration management lays down on every node besides the file and the unit, as often as it likes. */
export function unattendedCommands(input: JoiningInput): Command[] {
  return [
    {
      id: 'code-file',
      label: 'The code, in a file that only root reads',
      text: [
        heredoc(`${FOLDER}/code`, `${codeOf(input)}\n`, '0600'),
        heredoc(`/etc/systemd/system/${SERVICE}.d/code.conf`, CODE_DROP_IN, '0644'),
      ].join('\n'),
    },
    {
      id: 'labels-file',
      label: 'Labels, one key=value a line: another file for each place',
      text: heredoc(`${FOLDER}/labels`, 'harbour=Tarnwick\n', '0644'),
    },
    {
      id: 'unattended-environment',
      label: 'The settings, the same everywhere: the name is the host’s',
      text: heredoc('/etc/thinspan-agent.env', settings(input), '0600', { expand: true }),
    },
    {
      id: 'unattended-enrol',
      label:
        'Where there is no systemd, as the agent’s own user: done already, it changes nothing and ends with 0',
      text: wrapped([
        `node ${FILE_NAME} enrol`,
        `--collector ${input.origin}`,
        `--code-file ${FOLDER}/code`,
        `--labels-file ${FOLDER}/labels`,
        `--listen 0.0.0.0:${AGENT_PORT}`,
        `--address "ws://$(hostname -f):${AGENT_PORT}"`,
        '--config agent.json',
      ]),
    },
  ]
}

function settings({ origin }: JoiningInput): string {
  return [
    `THINSPAN_COLLECTOR=${origin}`,
    `THINSPAN_LABELS_FILE=${FOLDER}/labels`,
    `THINSPAN_LISTEN=0.0.0.0:${AGENT_PORT}`,
    `THINSPAN_ADDRESS=ws://$(hostname -f):${AGENT_PORT}`,
    `THINSPAN_NEIGHBOURS_FROM=file:${FOLDER}/peers`,
    `THINSPAN_AGENTS_AT=${AGENT_PORT}`,
    '',
  ].join('\n')
}
